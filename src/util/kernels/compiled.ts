/**
 * The compiled kernels of this thread: all of `src/**\/*.as.ts` in one WebAssembly module over `kernelMemory`.
 *
 * Each kernel has a plain twin in TypeScript that does the same arithmetic in the same order on the same memory, to the
 * last bit. The twin runs where `VISVET_KERNELS=plain` asks for it and where the processor has no SIMD.
 */
import { existsSync, readFileSync } from "node:fs";
import { kernelMemory } from "./memory.ts";
import { CompileError, Instance, Module } from "./web-assembly.ts";

const MODULE = new URL("./kernels.wasm", import.meta.url);

function instantiate(): object | undefined {
  if (process.env.VISVET_KERNELS === "plain" || !existsSync(MODULE)) return undefined;
  try {
    const module = new Module(readFileSync(MODULE));
    return new Instance(module, { env: { memory: kernelMemory.memory } }).exports;
  } catch (error) {
    // No SIMD: the module is not understood. Anything else is a defect of ours.
    if (error instanceof CompileError) return undefined;
    throw error;
  }
}

let compiled: object | undefined;
let isLoaded = false;

/** The compiled kernels, whatever was asked for; undefined where they cannot run. */
export function compiledKernels(): object | undefined {
  if (!isLoaded) compiled = instantiate();
  isLoaded = true;
  return compiled;
}

/**
 * Kernels by name: the compiled ones, or where they cannot run their plain twins.
 *
 * @param plain the twins; a compiled kernel has the name and the parameters of its twin
 */
export function kernelsOr<K extends object>(plain: K): K {
  return (compiledKernels() as K | undefined) ?? plain;
}
