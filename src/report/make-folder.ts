/** The folder of an output. */
import { mkdir } from "node:fs/promises";
import { InputError } from "../util/errors.ts";
import { adviceFor } from "../util/write-file.ts";

/** Made where it is not there, with the folders above it. @throws InputError when it cannot be */
export async function makeFolder(folder: string): Promise<void> {
  try {
    await mkdir(folder, { recursive: true });
  } catch (cause) {
    const code = (cause as NodeJS.ErrnoException).code ?? "";
    const what = `the folder cannot be made${code === "" ? "" : ` (${code})`}`;
    throw new InputError(what, { file: folder }, adviceFor(code), { cause });
  }
}
