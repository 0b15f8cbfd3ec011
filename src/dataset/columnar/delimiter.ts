/** What divides the names in the first line of a table of text. */

const DELIMITERS = [",", "\t", ";", "|"] as const;

/** The delimiter of a line of names; undefined when nothing divides it. */
export function delimiterOf(line: string): string | undefined {
  const bare = line.replace(/"(?:[^"]|"")*"/g, "");
  const counts = DELIMITERS.map((delimiter) => bare.split(delimiter).length - 1);
  const most = Math.max(...counts);
  return most === 0 ? undefined : DELIMITERS[counts.indexOf(most)];
}

/** The first line that is neither empty nor a comment. */
export function headerLine(head: Uint8Array): string | undefined {
  const text = new TextDecoder("utf-8").decode(head).replace(/^\ufeff/, "");
  return text.split(/\r\n|\n|\r/).find((line) => line.trim() !== "" && !line.startsWith("#"));
}
