/** Where an Arrow writer's bytes wait until they are taken: its own queue would grow without end before a slow disk. */
import { AsyncByteQueue } from "apache-arrow";

export class TakenBytes extends AsyncByteQueue {
  #chunks: Uint8Array[] = [];

  override write(value: Uint8Array): void {
    // The writer's chunks share buffers that it writes again.
    this.#chunks.push(value.slice());
  }

  take(): Uint8Array {
    const bytes = Buffer.concat(this.#chunks);
    this.#chunks = [];
    return bytes;
  }
}
