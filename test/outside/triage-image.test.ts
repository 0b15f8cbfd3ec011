import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { openFits } from "../../src/dataset/fits/hdus.ts";
import { card, headerBlocks, real } from "../../src/dataset/fits/write.ts";
import { placeOf, skyAxes } from "../../src/triage/image/projection.ts";
import { readSkyImage } from "../../src/triage/image/sky-image.ts";
import { emptyPlane, Fft2 } from "../../src/triage/uv/fft2.ts";
import { memorySource } from "../dataset/fits/memory-cursor.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

interface Stored {
  readonly pixels: readonly (readonly [number, number])[];
  readonly places: Readonly<
    Record<
      string,
      {
        readonly cards: Readonly<Record<string, number>>;
        readonly sky: readonly (readonly [number, number])[];
      }
    >
  >;
  readonly images: Readonly<
    Record<string, { readonly file: string; readonly pixels: readonly (number | null)[] }>
  >;
  readonly transform: Readonly<Record<string, readonly number[]>>;
}

const { pixels, places, images, transform } = stored<Stored>("triage-image");

describe("pixel to sky", () => {
  itIsFresh("triage-image");

  // astropy.wcs, SIN projection; angles agree to 1e-9 deg (4 microarcseconds).
  it.each(Object.entries(places))("agrees with Astropy for a header with %s", async (_, { cards, sky }) => {
    const bytes = headerBlocks([
      card("SIMPLE", true),
      card("BITPIX", 8),
      card("NAXIS", 2),
      card("NAXIS1", 64),
      card("NAXIS2", 64),
      card("CTYPE1", "RA---SIN"),
      card("CTYPE2", "DEC--SIN"),
      card("CRVAL1", real(127.5)),
      card("CRVAL2", real(-28.25)),
      card("CRPIX1", real(33)),
      card("CRPIX2", real(31.5)),
      ...Object.entries(cards).map(([key, value]) => card(key, real(value))),
    ]);
    const file = Buffer.concat([bytes, Buffer.alloc(2880 * 2)]);
    const { header } = (await openFits(memorySource(file))).hdus[0];
    const axes = skyAxes(header, [64, 64]);
    const [a, b, c, d] = axes.matrix;
    pixels.forEach(([x, y], i) => {
      const [dx, dy] = [x - 1 - axes.reference[0], y - 1 - axes.reference[1]];
      const place = placeOf(axes, a * dx + b * dy, c * dx + d * dy);
      expect((place.rightAscension * 180) / Math.PI).toBeCloseTo(sky[i]![0], 9);
      expect((place.declination * 180) / Math.PI).toBeCloseTo(sky[i]![1], 9);
    });
  });
});

describe("pixels of an image", () => {
  // astropy.io.fits on the same bytes, BSCALE, BZERO and BLANK applied.
  it.each(Object.entries(images))(
    "are as Astropy reads them, BITPIX %s",
    async (_, { file, pixels: read }) => {
      const folder = mkdtempSync(join(tmpdir(), "visvet-"));
      try {
        const path = join(folder, "image.fits");
        writeFileSync(path, Buffer.from(file, "base64"));
        const image = await readSkyImage(path);
        const ours = Array.from(image.pixels, (value, i) => (image.known[i] === 1 ? value : null));
        expect(ours).toEqual(read);
        expect(ours.filter((value) => value === null).length).toBeGreaterThan(0);
      } finally {
        rmSync(folder, { recursive: true });
      }
    },
  );
});

describe("Fft2", () => {
  // numpy.fft.fft2 and ifft2; double precision over 256 numbers leaves 1e-12.
  it.each([
    [-1, "forward"],
    [1, "backward"],
  ] as const)("agrees with NumPy, sign %i", (sign, name) => {
    const plane = emptyPlane(16);
    plane.re.set(transform.re!);
    plane.im.set(transform.im!);
    new Fft2(16).transform(plane, sign);
    for (let i = 0; i < 256; i++) {
      expect(plane.re[i]).toBeCloseTo(transform[`${name}Re`]![i]!, 11);
      expect(plane.im[i]).toBeCloseTo(transform[`${name}Im`]![i]!, 11);
    }
  });
});
