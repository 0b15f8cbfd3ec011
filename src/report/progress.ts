/** A bar on standard error while a check runs; nothing at all where that is no terminal. */
import { Chalk } from "chalk";
import { plainText } from "../util/terminal.ts";
import { displayWidth, wrap } from "./text/width.ts";

/** As much of a stream as the bar needs. */
export interface ProgressStream {
  readonly isTTY?: boolean;
  readonly columns?: number;
  write(text: string): unknown;
}

export interface Progress {
  /** @param share of the stage that is done, 0..1 */
  readonly stage: (name: string, share: number) => void;
  /** Take the bar away. Safe to call twice, and after it nothing more is drawn. */
  readonly end: () => void;
}

const BAR = 24;
const ERASE_LINE = "\r\u001b[2K";

/**
 * @param environment NO_COLOR, when not empty, leaves the colours out (no-color.org)
 */
export function createProgress(
  stream: ProgressStream,
  environment: Readonly<Record<string, string | undefined>> = process.env,
): Progress {
  if (stream.isTTY !== true || environment.TERM === "dumb") return { stage: () => {}, end: () => {} };
  const noColour = (environment.NO_COLOR ?? "") !== "";
  const chalk = new Chalk({ level: noColour ? 0 : 1 });
  let drawn = "";
  let ended = false;
  return {
    stage: (name, share) => {
      if (ended) return;
      const text = lineText(name, share, (stream.columns ?? 80) - 1);
      // A block more that changes nothing on the screen is not worth a write.
      if (text === drawn) return;
      drawn = text;
      stream.write(ERASE_LINE + chalk.cyan(text));
    },
    end: () => {
      if (!ended && drawn !== "") stream.write(ERASE_LINE);
      ended = true;
    },
  };
}

/** `[########----------------]  33 %  Surveying`, cut to the terminal: a broken line could not be erased. */
function lineText(name: string, share: number, columns: number): string {
  const done = Number.isFinite(share) ? Math.min(1, Math.max(0, share)) : 0;
  const filled = Math.floor(done * BAR);
  const percent = String(Math.floor(done * 100)).padStart(3);
  const bar = `[${"#".repeat(filled)}${"-".repeat(BAR - filled)}]`;
  const text = `${bar} ${percent} %  ${plainText(name)}`;
  if (displayWidth(text) <= columns) return text;
  const short = `${percent} %  ${plainText(name)}`;
  return columns < 2 ? "" : (wrap(short.trim(), columns)[0] ?? "");
}
