import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { TimeList } from "../../src/measure/time-list.ts";

function listOf(times: readonly number[], most?: number): TimeList {
  const list = new TimeList(most);
  for (const time of times) list.add(time);
  return list;
}

const times = fc.array(
  fc.integer({ min: 0, max: 3000 }).map((step) => 60_000 + step * 1.1e-7),
  { maxLength: 400 },
);

describe("TimeList", () => {
  it("holds each time once, ascending", () => {
    expect([...listOf([3, 1, 2, 3, 1]).sorted]).toEqual([1, 2, 3]);
    expect([...listOf([]).sorted]).toEqual([]);
  });

  it.each([20, 1000])("is the same in any order and grouping, with room for %i times", (most) => {
    fc.assert(
      fc.property(times, fc.nat(), (all, cut) => {
        const at = cut % (all.length + 1);
        const joined = listOf(all.slice(at).reverse(), most);
        joined.merge(listOf(all.slice(0, at), most));
        expect(joined.sorted).toEqual(listOf(all, most).sorted);
      }),
    );
  });

  it("rounds down to ever coarser steps when times are too many", () => {
    const many = Array.from({ length: 1000 }, (_, i) => 60_000 + i * 2 ** -24);
    const kept = listOf(many, 100).sorted;
    expect(kept.length).toBeLessThanOrEqual(100);
    expect(kept.length).toBeGreaterThan(50);
    expect(kept[0]).toBe(60_000);
    // 16 steps of 5.15 ms.
    expect(kept[1]! - kept[0]!).toBe(2 ** -20);
  });
});
