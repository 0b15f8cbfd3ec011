/** Small text files that people write: plans, scenarios. */
import { open } from "node:fs/promises";
import { InputError } from "./errors.ts";

/** A page or a few of text: more than this is some other file. */
const MOST_BYTES = 1 << 20;

/**
 * @param what the file should be, such as "plan", for errors
 * @throws InputError when it cannot be read, is larger than 1 MB or is not UTF-8
 */
export async function readSmallText(path: string, what: string): Promise<string> {
  try {
    const file = await open(path);
    try {
      // Read, not measured first: a pipe or a device has no size.
      const buffer = Buffer.alloc(MOST_BYTES + 1);
      let length = 0;
      for (;;) {
        const { bytesRead } = await file.read(buffer, length, buffer.length - length);
        length += bytesRead;
        if (bytesRead === 0 || length > MOST_BYTES) break;
      }
      if (length > MOST_BYTES) {
        throw new InputError(
          `the ${what} is larger than 1 MB`,
          { file: path },
          "Give a YAML file of a few lines",
        );
      }
      return new TextDecoder("utf-8", { fatal: true }).decode(buffer.subarray(0, length));
    } finally {
      await file.close();
    }
  } catch (cause) {
    if (cause instanceof InputError) throw cause;
    const why = cause instanceof TypeError ? "it is not UTF-8 text" : (cause as Error).message;
    throw new InputError(
      `the ${what} cannot be read: ${why}`,
      { file: path },
      "Give the path of a YAML file",
      {
        cause,
      },
    );
  }
}
