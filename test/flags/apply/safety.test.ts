/** What `apply` never does: touch its input, overwrite, leave half a file, or name a copy that reads wrongly. */
import { linkSync, mkdirSync, readdirSync, readFileSync, symlinkSync, writeFileSync } from "node:fs";
import { type FileHandle, open } from "node:fs/promises";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { fieldView } from "../../../src/dataset/field-view.ts";
import { flaggedView } from "../../../src/dataset/flagged-view.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { applyFlags } from "../../../src/flags/apply/apply.ts";
import { leftOver } from "../../../src/util/new-output.ts";
import { groupFile } from "../../dataset/group-file.ts";
import { pieceFolder, renumbered, rowsOf } from "../../dataset/joined/pieces.ts";
import { readAll } from "../../support/read-all.ts";
import { simulated } from "../../support/scenarios.ts";
import { flag, lineOfRejection, outputFolder } from "./copies.ts";

const folder = outputFolder();
const FLAG = flag({ antennas: [2] });
let made = 0;

/** A folder of its own with a dataset in it. */
function place(): { at: string; path: string } {
  const at = join(folder, `case-${made++}`);
  mkdirSync(at);
  const path = join(at, "night.uvfits");
  writeFileSync(path, groupFile());
  return { at, path };
}

async function apply(path: string, out: string, more: object = {}) {
  return applyFlags({ dataset: await openDataset(path), flags: [FLAG], out, ...more });
}

describe("the output", () => {
  it("is refused where something has its name: the input, a link to it, a link to nowhere, a folder", async () => {
    const { at, path } = place();
    const before = readFileSync(path);
    symlinkSync(path, join(at, "link"));
    linkSync(path, join(at, "same"));
    symlinkSync(join(at, "nowhere"), join(at, "dangling"));
    mkdirSync(join(at, "folder"));
    for (const name of ["night.uvfits", "link", "same", "dangling", "folder"]) {
      expect(await lineOfRejection(apply(path, join(at, name))), name).toMatch(
        /there is something of that name already, and nothing is ever overwritten/,
      );
    }
    expect(readFileSync(path).equals(before)).toBe(true);
    expect(readdirSync(at)).toHaveLength(5);
  });

  it("is refused inside the folder that is the dataset, also through a link, and where a pattern would find it", async () => {
    const { at, path } = place();
    symlinkSync(at, join(folder, "way-in"));
    const refused = /the copy would be made among the files of the dataset/;
    for (const out of [join(at, "copy.uvfits"), join(folder, "way-in", "copy.uvfits")]) {
      expect(await lineOfRejection(apply(path, out, { named: [at] }))).toMatch(refused);
    }
    for (const glob of [
      join(at, "*.uvfits"),
      join(folder, "case-*", "copy.*"),
      join(folder, "**", "*.uvfits"),
    ]) {
      expect(await lineOfRejection(apply(path, join(at, "copy.uvfits"), { named: [glob] }))).toMatch(refused);
    }
    await apply(path, join(at, "copy.fits"), { named: [join(at, "*.uvfits")] });
    await apply(path, `${at}-copy.uvfits`, { named: [at] });
  });

  it("says where its folder is not there", async () => {
    const { at, path } = place();
    expect(await lineOfRejection(apply(path, join(at, "no", "copy.uvfits")))).toMatch(
      /it cannot be written \(ENOENT\)\. Check that the folder exists/,
    );
  });
});

/** Files whose writes go through `write` first. */
function through(write: (bytes: Uint8Array, written: number) => Uint8Array) {
  return async (path: string, flags: string): Promise<FileHandle> => {
    const handle = await open(path, flags);
    let written = 0;
    return new Proxy(handle, {
      get(target, key) {
        if (key !== "write") {
          const value: unknown = Reflect.get(target, key);
          return typeof value === "function" ? value.bind(target) : value;
        }
        return async (bytes: Uint8Array, from: number, count: number) => {
          const part = write(bytes.subarray(from, from + count), written);
          const result = await target.write(part, 0, part.length);
          written += result.bytesWritten;
          return result;
        };
      },
    });
  };
}

describe("a run that cannot finish", () => {
  it.each(["copy.uvfits", "copy.uvfits.gz"])(
    "on a full disk leaves nothing, and says so: %s",
    async (name) => {
      const { at, path } = place();
      const before = readFileSync(path);
      const openFile = through((bytes, written) => {
        // The size of the packed copy is beyond this, too.
        if (written + bytes.length > 400) {
          throw Object.assign(new Error("ENOSPC: no space left on device, write"), { code: "ENOSPC" });
        }
        return bytes;
      });
      expect(await lineOfRejection(apply(path, join(at, name), { openFile }))).toMatch(
        /it cannot be written \(ENOSPC\)\. The disk or your quota is full: free some space and run it again$/,
      );
      expect(readdirSync(at)).toEqual(["night.uvfits"]);
      expect(readFileSync(path).equals(before)).toBe(true);
    },
  );

  it("with a copy that reads back otherwise removes it, and says which row", async () => {
    const { at, path } = place();
    const last = dataEnd(readFileSync(path).length) - 3;
    // The weight of the last sample of all but one, as the disk might turn a bit.
    const damaged = through((bytes, written) => {
      const copy = Uint8Array.from(bytes);
      for (const [i] of bytes.entries()) if (written + i === last) copy[i]! ^= 1;
      return copy;
    });
    expect(await lineOfRejection(apply(path, join(at, "copy.uvfits"), { openFile: damaged }))).toMatch(
      /the copy does not read back as it should \(row 4: a weight is -?[\d.]+, expected -?\d+\) and was removed/,
    );
    expect(readdirSync(at)).toEqual(["night.uvfits"]);
  });

  it("leaves the name to whoever took it in the meantime", async () => {
    const { at, path } = place();
    const out = join(at, "copy.uvfits");
    const late = through((bytes) => {
      writeFileSync(out, "somebody else's");
      return bytes;
    });
    expect(await lineOfRejection(apply(path, out, { openFile: late }))).toMatch(
      /it cannot be written \(EEXIST\)/,
    );
    expect(readFileSync(out, "utf8")).toBe("somebody else's");
    expect(readdirSync(at).sort()).toEqual(["copy.uvfits", "night.uvfits"]);
  });

  it("is named by the next one when it was killed", async () => {
    const { at, path } = place();
    const out = join(at, "copy.uvfits");
    // No process has this number: the largest that Linux gives is 2^22.
    mkdirSync(join(at, ".copy.uvfits.99999999.partial"));
    mkdirSync(join(at, `.copy.uvfits.${process.pid}.partial.txt`));
    mkdirSync(join(at, ".other.uvfits.99999999.partial"));
    expect(await leftOver(out)).toEqual([join(at, ".copy.uvfits.99999999.partial")]);
    await apply(path, out);
  });
});

/** Where the groups of the plain file end: the tables after them are whole blocks. */
function dataEnd(length: number): number {
  const groups = 4 * 4 * (6 + 3 * 2 * 3 * 2);
  const header = groupFile({ tables: [] }).length - Math.ceil(groups / 2880) * 2880;
  if (header >= length) throw new Error("the file is shorter than its header");
  return header + groups;
}

describe("a dataset that is not the file", () => {
  it("is refused: one in memory, a view of a field, one with flags laid over it", async () => {
    const { at, path } = place();
    const opened = await openDataset(path);
    for (const [dataset, said] of [
      [simulated().dataset, /is not in a file/],
      [await fieldView(opened, 1), /is a view of a dataset/],
      [flaggedView(opened, [FLAG]), /is a view of a dataset/],
    ] as const) {
      const out = join(at, "copy.uvfits");
      expect(await lineOfRejection(applyFlags({ dataset, flags: [FLAG], out }))).toMatch(said);
    }
    expect(readdirSync(at)).toEqual(["night.uvfits"]);
  });
});

describe("a dataset of several files", () => {
  const { folder: pieces, write } = pieceFolder();

  it.each(["weights", "flag-table"] as const)(
    "is copied into a folder, antennas by the numbers of each file: %s",
    async (into) => {
      const time = { start: "2026-03-01T12:00:00", duration: "1min" };
      const { dataset: whole } = simulated({ time });
      const half = whole.rows / 2;
      const [one, two] = [`${into}-1.uvfits`, `${into}-2.uvfits`];
      const first = await write(rowsOf(whole, 0, half), one);
      const second = await write(
        renumbered(rowsOf(whole, half, whole.rows), (old) => 100 - old),
        two,
      );
      const bytes = [first, second].map((path) => readFileSync(path));
      const joined = await openDataset([first, second]);
      const out = join(folder, `night-${into}`);
      const { paths } = await applyFlags({ dataset: joined, flags: [FLAG], out, into });
      expect(paths).toEqual([join(out, one), join(out, two)]);
      expect(readdirSync(out).sort()).toEqual([one, two]);
      for (const [i, path] of paths.entries()) {
        const own = i === 0 ? 2 : 98;
        const block = await readAll(await openDataset(path));
        const perRow = block.weight.length / block.rows;
        for (let row = 0; row < block.rows; row++) {
          const touched = block.antenna1[row] === own || block.antenna2[row] === own;
          const weights = block.weight.subarray(row * perRow, (row + 1) * perRow);
          expect(weights.every((weight) => weight < 0)).toBe(touched);
        }
      }
      expect([first, second].map((path) => readFileSync(path))).toEqual(bytes);
      expect(readdirSync(pieces).filter((name) => name.startsWith("."))).toEqual([]);
    },
  );
});
