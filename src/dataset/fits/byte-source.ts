/** Bytes at any position of some content, whatever it is kept in. */

export interface ByteSource {
  /** path as the user gave it */
  readonly path: string;
  readonly bytesOnDisk: number;
  /** reading backwards costs a new start: read in one direction */
  readonly sequential: boolean;
  /** @param from the first byte that will be read */
  cursor(from?: number): Promise<Cursor>;
}

export interface Cursor {
  /**
   * Fill `into` from byte `at` on.
   *
   * @returns bytes read; fewer than asked for only where the content ends
   * @throws InputError when the content is damaged
   */
  read(into: Uint8Array, at: number): Promise<number>;
  /** The same without waiting for others, where that is possible at all; quickest where the bytes are in memory. */
  readNow?(into: Uint8Array, at: number): number;
  /** `at`, or the size of the content when that is less. */
  reach(at: number): Promise<number>;
  close(): Promise<void>;
}
