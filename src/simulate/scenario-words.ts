/** The keys and kinds that scenarios know, for the right spelling of a wrong one. */
import { z } from "zod";

/** Keys of every object of a schema, and the literal words that its choices may be. */
export function schemaWords(schema: z.ZodType): { keys: ReadonlySet<string>; words: ReadonlySet<string> } {
  const keys = new Set<string>();
  const words = new Set<string>();
  collect(schema, keys, words, new Set());
  return { keys, words };
}

function collect(schema: unknown, keys: Set<string>, words: Set<string>, seen: Set<unknown>): void {
  if (seen.has(schema)) return;
  seen.add(schema);
  const deeper = (inner: unknown): void => collect(inner, keys, words, seen);
  if (schema instanceof z.ZodObject) {
    for (const [key, value] of Object.entries(schema.shape)) {
      keys.add(key);
      deeper(value);
    }
  } else if (schema instanceof z.ZodUnion) {
    for (const option of schema.options) deeper(option);
  } else if (schema instanceof z.ZodArray) deeper(schema.element);
  else if (schema instanceof z.ZodLiteral) for (const value of schema.values) words.add(String(value));
  else if (schema instanceof z.ZodEnum) for (const value of schema.options) words.add(String(value));
  else if (
    schema instanceof z.ZodOptional ||
    schema instanceof z.ZodDefault ||
    schema instanceof z.ZodPrefault
  ) {
    deeper(schema.unwrap());
  } else if (schema instanceof z.ZodPipe) deeper(schema.in);
}
