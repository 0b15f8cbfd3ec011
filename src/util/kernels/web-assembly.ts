/** As much of WebAssembly as is used here, in types: those of Node leave it to a browser's. */

export interface WebAssemblyMemory {
  readonly buffer: SharedArrayBuffer;
  /** @param pages of 64 kB, to add */
  grow(pages: number): number;
}

interface WebAssemblyHere {
  readonly Memory: new (limits: { initial: number; maximum: number; shared: true }) => WebAssemblyMemory;
  readonly Module: new (bytes: Uint8Array) => object;
  readonly Instance: new (
    module: object,
    imports: { readonly env: { readonly memory: WebAssemblyMemory } },
  ) => { readonly exports: object };
  /** the module holds what this processor or this Node does not know */
  readonly CompileError: new () => Error;
}

export const { Memory, Module, Instance, CompileError } = (
  globalThis as unknown as { readonly WebAssembly: WebAssemblyHere }
).WebAssembly;
