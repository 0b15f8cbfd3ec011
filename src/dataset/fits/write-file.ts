/** A FITS file written beside its final name and renamed into place, so that a killed run leaves no half file. */
import { type FileHandle, open, rename, rm, stat } from "node:fs/promises";
import { InputError } from "../../util/errors.ts";
import { padding } from "./write-header.ts";

export class FitsFileWriter {
  readonly #path: string;
  readonly #beside: string;
  readonly #handle: FileHandle;
  /** bytes since the start of the current data unit */
  #unitBytes = 0;

  private constructor(path: string, beside: string, handle: FileHandle) {
    this.#path = path;
    this.#beside = beside;
    this.#handle = handle;
  }

  /** @throws InputError when `path` exists (unless `overwrite`) or its folder cannot be written */
  static async create(path: string, options: { overwrite?: boolean } = {}): Promise<FitsFileWriter> {
    if (options.overwrite !== true && (await exists(path))) {
      throw new InputError("the file exists already", { file: path }, "Choose another name or move it away");
    }
    const beside = `${path}.${process.pid}.partial`;
    try {
      return new FitsFileWriter(path, beside, await open(beside, "w"));
    } catch (cause) {
      throw new InputError(
        `the file cannot be written (${(cause as NodeJS.ErrnoException).code ?? String(cause)})`,
        { file: path },
        "Check that the folder exists and can be written",
        { cause },
      );
    }
  }

  /** A whole number of blocks: a header, or a table from `binaryTable`. Ends the data unit before it. */
  async blocks(bytes: Uint8Array): Promise<void> {
    await this.endData();
    await this.#write(bytes);
  }

  /** Part of a data unit, of any length. */
  async data(bytes: Uint8Array): Promise<void> {
    await this.#write(bytes);
    this.#unitBytes += bytes.length;
  }

  /** Pad the data unit with zeros to a whole block. */
  async endData(): Promise<void> {
    await this.#write(new Uint8Array(padding(this.#unitBytes)));
    this.#unitBytes = 0;
  }

  /** Pad, close and give the file its name. */
  async commit(): Promise<void> {
    await this.endData();
    await this.#handle.close();
    await rename(this.#beside, this.#path);
  }

  /** Close and leave nothing behind. */
  async abort(): Promise<void> {
    await this.#handle.close();
    await rm(this.#beside, { force: true });
  }

  async #write(bytes: Uint8Array): Promise<void> {
    let done = 0;
    while (done < bytes.length) {
      const { bytesWritten } = await this.#handle.write(bytes, done, bytes.length - done);
      done += bytesWritten;
    }
  }
}

async function exists(path: string): Promise<boolean> {
  try {
    await stat(path);
    return true;
  } catch {
    return false;
  }
}
