import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { Arena, kernelMemory } from "../../../src/util/kernels/memory.ts";

describe("the kernels' memory", () => {
  it("gives no byte twice, and takes back all that is released, in any order", () => {
    const before = kernelMemory.used;
    fc.assert(
      fc.property(fc.array(fc.record({ bytes: fc.nat(200_000), drop: fc.nat() })), (steps) => {
        const held: { at: number; bytes: number; mark: number }[] = [];
        for (const [mark, { bytes, drop }] of steps.entries()) {
          const at = kernelMemory.allocate(bytes)!;
          expect(at % 64).toBe(0);
          kernelMemory.heap.u8.fill(mark & 255, at, at + bytes);
          held.push({ at, bytes, mark });
          if (drop % 3 !== 0) continue;
          const [gone] = held.splice(drop % held.length, 1);
          kernelMemory.release(gone!.at);
        }
        const { u8 } = kernelMemory.heap;
        for (const { at, bytes, mark } of held) {
          expect(u8.subarray(at, at + bytes).every((byte) => byte === (mark & 255))).toBe(true);
          kernelMemory.release(at);
        }
        expect(kernelMemory.used).toBe(before);
      }),
      { numRuns: 30 },
    );
  });

  it("keeps views alive while it grows", () => {
    const arena = new Arena();
    const at = arena.allocate(16)!;
    const view = new Float32Array(kernelMemory.heap.f32.buffer, at, 4);
    view.fill(7);
    arena.allocate(kernelMemory.heap.u8.length);
    kernelMemory.heap.f32[at / 4] = 8;
    expect([...view]).toEqual([8, 7, 7, 7]);
    expect(kernelMemory.addressOf(view)).toBe(at);
    expect(kernelMemory.addressOf(new Float32Array(4))).toBeUndefined();
    arena.release();
  });

  it("says that there is no more room, and refuses what it did not give", () => {
    expect(kernelMemory.allocate(2 ** 31)).toBeUndefined();
    expect(() => kernelMemory.release(3)).toThrow("nothing is allocated at 3");
  });
});
