/** Arrays that several threads see without copies of their own. */

type Numbers = Uint8Array | Int32Array | Uint32Array | Float32Array | Float64Array;

/** The same numbers in shared memory; the array itself where it lies there already. */
export function sharedArray<A extends Numbers>(array: A): A {
  if (array.buffer instanceof SharedArrayBuffer) return array;
  const Kind = array.constructor as new (buffer: SharedArrayBuffer) => A;
  const shared = new Kind(new SharedArrayBuffer(array.byteLength));
  shared.set(array as never);
  return shared;
}
