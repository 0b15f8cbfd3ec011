/**
 * Rows of a dataset gathered from samples that come in any order, in bounded memory. The rows that are being made are
 * held; a sample of an earlier row goes into a log by stretches of rows, and each log is laid over its stretch at the
 * end, in one pass.
 */
import { join } from "node:path";
import { bytesOf, SpoolFile } from "./spool-file.ts";

/** Columns of a row, without its samples. */
export interface SpoolRow {
  time: number;
  u: number;
  v: number;
  w: number;
  antenna1: number;
  antenna2: number;
  subarray: number;
  field: number;
  setup: number;
  integration: number;
}

/** A row record: time, u, v, w as doubles; antennas, sub-array, field, setup as int32; integration as float32. */
export const ROW_BYTES = 56;
/** Weight of a sample that never came: not a number, and of no calculation's making. */
export const ABSENT = 0x7fc0_0bad;
export const ROWS_FILE = "rows";
export const SAMPLES_FILE = "samples";

const STRETCH_BYTES = 16 * 1024 * 1024;
const ROW_BUFFER = 1024;
/** A log entry: row in the stretch, sample, real, imaginary, weight. */
const ENTRY_WORDS = 5;
const LOG_CHUNK_ENTRIES = 4096;
const MOST_LOG_BYTES = 64 * 1024 * 1024;

export interface SpoolCounts {
  readonly rows: number;
  /** samples that never came: their weight is 0 */
  readonly missing: number;
  /** samples that came again: the first counts */
  readonly twice: number;
}

interface Log {
  /** entries not yet written */
  words: Uint32Array;
  used: number;
  /** byte and entries of those that are */
  readonly chunks: { readonly at: number; readonly entries: number }[];
}

export class SpoolWriter {
  readonly #rowSamples: number;
  readonly #stretchRows: number;
  readonly #rowFile: SpoolFile;
  readonly #sampleFile: SpoolFile;
  readonly #logPath: string;
  #logFile: SpoolFile | undefined;
  readonly #rowBuffer = new DataView(new ArrayBuffer(ROW_BUFFER * ROW_BYTES));
  #rows = 0;
  #bufferedRows = 0;
  /** the first row of the stretch that is held */
  #start = 0;
  readonly #held: Float32Array;
  readonly #heldBits: Uint32Array;
  readonly #logs = new Map<number, Log>();
  #logBytes = 0;
  #present = 0;
  #twice = 0;
  #closed = false;

  /** @param stretchBytes of samples held at once */
  constructor(folder: string, rowSamples: number, stretchBytes = STRETCH_BYTES) {
    this.#rowSamples = rowSamples;
    this.#stretchRows = Math.max(1, Math.floor(stretchBytes / (12 * rowSamples)));
    this.#held = new Float32Array(this.#stretchRows * 3 * rowSamples);
    this.#heldBits = new Uint32Array(this.#held.buffer);
    this.#rowFile = new SpoolFile(join(folder, ROWS_FILE));
    this.#sampleFile = new SpoolFile(join(folder, SAMPLES_FILE));
    this.#logPath = join(folder, "log");
    this.#clear();
  }

  /** Most bytes of samples and of log that this ever held. */
  get heldBytes(): number {
    return this.#held.byteLength + this.#logBytes;
  }

  get rows(): number {
    return this.#rows;
  }

  addRow(row: Readonly<SpoolRow>): number {
    if (this.#rows === this.#start + this.#stretchRows) this.#nextStretch();
    const view = this.#rowBuffer;
    const at = this.#bufferedRows * ROW_BYTES;
    const little = true;
    view.setFloat64(at, row.time, little);
    view.setFloat64(at + 8, row.u, little);
    view.setFloat64(at + 16, row.v, little);
    view.setFloat64(at + 24, row.w, little);
    view.setInt32(at + 32, row.antenna1, little);
    view.setInt32(at + 36, row.antenna2, little);
    view.setInt32(at + 40, row.subarray, little);
    view.setInt32(at + 44, row.field, little);
    view.setInt32(at + 48, row.setup, little);
    view.setFloat32(at + 52, row.integration, little);
    this.#bufferedRows += 1;
    if (this.#bufferedRows === ROW_BUFFER) this.#flushRows();
    this.#rows += 1;
    return this.#rows - 1;
  }

  /** @param sample index in the row, polarization fastest */
  put(row: number, sample: number, real: number, imag: number, weight: number): void {
    if (row < this.#start) {
      this.#log(row, sample, real, imag, weight);
      return;
    }
    this.#present += this.#lay(row - this.#start, sample, real, imag, weight);
  }

  /** @returns 1 for a sample that was not there yet, else 0 */
  #lay(row: number, sample: number, real: number, imag: number, weight: number): number {
    const at = row * 3 * this.#rowSamples + sample;
    if (this.#heldBits[at + 2 * this.#rowSamples] !== ABSENT) {
      this.#twice += 1;
      return 0;
    }
    this.#held[at] = real;
    this.#held[at + this.#rowSamples] = imag;
    this.#held[at + 2 * this.#rowSamples] = weight;
    return 1;
  }

  #clear(): void {
    this.#held.fill(0);
    const n = this.#rowSamples;
    for (let row = 0; row < this.#stretchRows; row++) {
      this.#heldBits.fill(ABSENT, (3 * row + 2) * n, (3 * row + 3) * n);
    }
  }

  #nextStretch(): void {
    this.#sampleFile.write(bytesOf(this.#held), this.#start * this.#rowSamples * 12);
    this.#start += this.#stretchRows;
    this.#clear();
  }

  #flushRows(): void {
    const first = this.#rows + 1 - this.#bufferedRows;
    this.#rowFile.write(
      new Uint8Array(this.#rowBuffer.buffer, 0, this.#bufferedRows * ROW_BYTES),
      first * ROW_BYTES,
    );
    this.#bufferedRows = 0;
  }

  #log(row: number, sample: number, real: number, imag: number, weight: number): void {
    const stretch = Math.floor(row / this.#stretchRows);
    let log = this.#logs.get(stretch);
    if (log === undefined) {
      log = { words: new Uint32Array(0), used: 0, chunks: [] };
      this.#logs.set(stretch, log);
    }
    if (log.words.length === 0) {
      if (this.#logBytes >= MOST_LOG_BYTES) this.#flushLogs();
      log.words = new Uint32Array(LOG_CHUNK_ENTRIES * ENTRY_WORDS);
      this.#logBytes += log.words.byteLength;
    }
    const at = log.used * ENTRY_WORDS;
    BITS_OF[0] = real;
    BITS_OF[1] = imag;
    BITS_OF[2] = weight;
    log.words[at] = row - stretch * this.#stretchRows;
    log.words[at + 1] = sample;
    log.words[at + 2] = BITS[0]!;
    log.words[at + 3] = BITS[1]!;
    log.words[at + 4] = BITS[2]!;
    log.used += 1;
    if (log.used === LOG_CHUNK_ENTRIES) this.#flushLog(log);
  }

  #flushLog(log: Log): void {
    if (log.used === 0) return;
    this.#logFile ??= new SpoolFile(this.#logPath);
    const at = this.#logFile.bytes;
    this.#logFile.write(bytesOf(log.words.subarray(0, log.used * ENTRY_WORDS)), at);
    log.chunks.push({ at, entries: log.used });
    log.used = 0;
  }

  #flushLogs(): void {
    for (const log of this.#logs.values()) {
      this.#flushLog(log);
      log.words = new Uint32Array(0);
    }
    this.#logBytes = 0;
  }

  /** Lay every log over its stretch; the files are whole after this. */
  finish(): SpoolCounts {
    if (this.#bufferedRows > 0) {
      const first = this.#rows - this.#bufferedRows;
      const bytes = new Uint8Array(this.#rowBuffer.buffer, 0, this.#bufferedRows * ROW_BYTES);
      this.#rowFile.write(bytes, first * ROW_BYTES);
    }
    const rest = (this.#rows - this.#start) * 3 * this.#rowSamples;
    this.#sampleFile.write(bytesOf(this.#held.subarray(0, rest)), this.#start * this.#rowSamples * 12);
    this.#flushLogs();
    for (const [stretch, log] of this.#logs) this.#layLog(stretch, log);
    this.close();
    const samples = this.#rows * this.#rowSamples;
    return { rows: this.#rows, missing: samples - this.#present, twice: this.#twice };
  }

  #layLog(stretch: number, log: Log): void {
    const first = stretch * this.#stretchRows;
    const rows = Math.min(this.#stretchRows, this.#rows - first);
    const samples = bytesOf(this.#held.subarray(0, rows * 3 * this.#rowSamples));
    this.#sampleFile.read(samples, first * this.#rowSamples * 12);
    for (const { at, entries } of log.chunks) {
      const words = new Uint32Array(entries * ENTRY_WORDS);
      this.#logFile!.read(bytesOf(words), at);
      const values = new Float32Array(words.buffer);
      for (let i = 0; i < words.length; i += ENTRY_WORDS) {
        this.#present += this.#lay(words[i]!, words[i + 1]!, values[i + 2]!, values[i + 3]!, values[i + 4]!);
      }
    }
    this.#sampleFile.write(samples, first * this.#rowSamples * 12);
  }

  close(): void {
    if (this.#closed) return;
    this.#closed = true;
    this.#rowFile.close();
    this.#sampleFile.close();
    this.#logFile?.close();
    this.#logFile = undefined;
  }
}

const BITS_OF = new Float32Array(3);
const BITS = new Uint32Array(BITS_OF.buffer);
