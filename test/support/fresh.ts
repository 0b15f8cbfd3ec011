/** Stored reference values lie beside the script that makes them: where Python is, the script must still say the same. */
import { readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { expect, it } from "vitest";
import { pythonJson, systemTool } from "./require.ts";

/** The stored JSON of test/outside/<topic>.json. */
export function stored<T>(topic: string): T {
  return JSON.parse(readFileSync(outside(`${topic}.json`), "utf8")) as T;
}

/**
 * A test that runs test/outside/<topic>.py again.
 * @param relative tolerance: libraries differ between versions in the last digits
 */
export function itIsFresh(topic: string, relative = 1e-9): void {
  it.skipIf(systemTool("astropy") === undefined)(`${topic}.py still gives the stored values`, () => {
    expectAlike(pythonJson(outside(`${topic}.py`)), stored(topic), relative, topic);
  });
}

function outside(name: string): string {
  return fileURLToPath(new URL(`../outside/${name}`, import.meta.url));
}

function expectAlike(fresh: unknown, old: unknown, relative: number, path: string): void {
  if (typeof fresh === "number" && typeof old === "number") {
    const scale = Math.max(Math.abs(fresh), Math.abs(old), 1e-6);
    expect(Math.abs(fresh - old) / scale, path).toBeLessThan(relative);
  } else if (fresh !== null && typeof fresh === "object") {
    expect(Object.keys(fresh), path).toEqual(Object.keys(old as object));
    for (const [key, value] of Object.entries(fresh)) {
      expectAlike(value, (old as Record<string, unknown>)[key], relative, `${path}.${key}`);
    }
  } else {
    expect(fresh, path).toEqual(old);
  }
}
