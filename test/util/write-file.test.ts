import { existsSync } from "node:fs";
import { mkdir, mkdtemp, readdir, readFile, rm, symlink, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { InputError } from "../../src/util/errors.ts";
import { adviceFor, writeTextFile } from "../../src/util/write-file.ts";

let folder: string;
beforeEach(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-write-"));
});
afterEach(async () => {
  await rm(folder, { recursive: true, force: true });
});

const failure = (path: string, text = "text") =>
  writeTextFile(path, text).then(
    () => undefined,
    (error: unknown) => error,
  );

describe("writeTextFile", () => {
  it("replaces a file and leaves nothing beside it", async () => {
    const path = join(folder, "report.txt");
    await writeFile(path, "old");
    await writeTextFile(path, "new: λ");
    expect(await readFile(path, "utf8")).toBe("new: λ");
    expect(await readdir(folder)).toEqual(["report.txt"]);
  });

  it("leaves one whole file when many write it at once", async () => {
    const path = join(folder, "report.txt");
    const texts = Array.from({ length: 20 }, (_, i) => String(i).repeat(50_000));
    await Promise.all(texts.map((text) => writeTextFile(path, text)));
    expect(texts).toContain(await readFile(path, "utf8"));
    expect(await readdir(folder)).toEqual(["report.txt"]);
  });

  it("replaces a link, not what it points to", async () => {
    const target = join(folder, "precious");
    await writeFile(target, "precious");
    await symlink(target, join(folder, "report.txt"));
    await writeTextFile(join(folder, "report.txt"), "report");
    expect(await readFile(target, "utf8")).toBe("precious");
  });

  it("keeps a folder of that name, says so, and leaves nothing behind", async () => {
    const path = join(folder, "report.txt");
    await mkdir(path);
    const error = (await failure(path)) as InputError;
    expect(error).toBeInstanceOf(InputError);
    expect(error.line).toMatch(
      /report\.txt: the file cannot be written \(EISDIR\)\. Something else has that name/,
    );
    expect(await readdir(folder)).toEqual(["report.txt"]);
  });

  it("says that the folder is not there", async () => {
    const error = (await failure(join(folder, "no", "report.txt"))) as InputError;
    expect(error.line).toMatch(/\(ENOENT\)\. Check that the folder exists/);
  });

  it("says what to do about a full disk or quota", () => {
    expect(adviceFor("ENOSPC")).toContain("full");
    expect(adviceFor("EDQUOT")).toContain("quota");
  });

  // Linux's /dev/full answers every write with "no space left": the file is opened through a link in its place.
  it.skipIf(!existsSync("/dev/full"))(
    "never writes through a link that somebody put at its temporary name",
    async () => {
      const path = join(folder, "report.txt");
      await writeTextFile(path, "first");
      const used = Number(/-(\d+)\.tmp/.exec(await temporaryName(path))![1]);
      await symlink("/dev/full", `${path}.${process.pid}-${used + 1}.tmp`);
      const error = (await failure(path)) as InputError;
      expect(error.line).toContain("EEXIST");
      expect(await readFile(path, "utf8")).toBe("first");
    },
  );
});

/** The temporary name of a write that fails, from the error behind it. */
async function temporaryName(path: string): Promise<string> {
  const error = (await failure(join(path, "below"))) as InputError;
  return String((error.cause as NodeJS.ErrnoException).path);
}
