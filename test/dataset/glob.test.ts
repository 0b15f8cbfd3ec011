import { describe, expect, it } from "vitest";
import { globPattern, hasWildcard } from "../../src/dataset/glob.ts";

const matches = (glob: string, name: string) => {
  const [part] = globPattern(glob).parts;
  return part !== "**" && part!.test.test(name);
};

describe("globPattern", () => {
  it.each([
    ["*.fits", "night.fits", true],
    ["*.fits", "night.fits.gz", false],
    ["part?.fits", "part1.fits", true],
    ["part?.fits", "part12.fits", false],
    ["part[0-3].fits", "part2.fits", true],
    ["part[0-3].fits", "part4.fits", false],
    ["part[!0-3].fits", "part4.fits", true],
    ["a+(b)*.fits", "a+(b)c.fits", true],
    ["*.{fits}", "x.{fits}", true],
    ["*[]]", "x]", true],
    ["*[a\\]", "x\\", true],
    ["*", "line\nbreak", true],
  ])("%s against %s: %s", (glob, name, expected) => {
    expect(matches(glob, name)).toBe(expected);
  });

  it("keeps the folders before the first wildcard", () => {
    expect(globPattern("/data/night 1/*/a?.fits")).toMatchObject({ root: "/data/night 1", parts: [{}, {}] });
    expect(globPattern("*.fits").root).toBe("");
    expect(globPattern("/*.fits").root).toBe("/");
  });

  it("is quick on stars without end", () => {
    const stars = `x${"*".repeat(2000)}y`;
    expect(matches(stars, "x".repeat(255))).toBe(false);
  });

  it("says which range runs backwards", () => {
    expect(() => globPattern("[9-0]")).toThrow('"[9-0]" is no pattern');
  });

  it("takes a lone bracket as it is", () => {
    expect([hasWildcard("a[b.fits"), hasWildcard("a[b].fits"), hasWildcard("a].fits")]).toEqual([
      false,
      true,
      false,
    ]);
  });
});
