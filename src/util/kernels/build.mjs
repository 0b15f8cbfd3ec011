/**
 * Compile every kernel, `src/**\/*.as.ts`, into one WebAssembly module beside this file, and copy it to the paths given.
 *
 *   node src/util/kernels/build.mjs [copy.wasm…]
 *
 * Nothing is compiled where the module is newer than its sources.
 */
import { copyFile, mkdir, readdir, rename, stat, writeFile } from "node:fs/promises";
import { dirname, join, relative } from "node:path";
import { fileURLToPath } from "node:url";

const here = dirname(fileURLToPath(import.meta.url));
const root = join(here, "../../..");
const module = join(here, "kernels.wasm");

const OPTIONS = [
  "-O3",
  "--noAssert",
  "--runtime",
  "stub",
  "--enable",
  "simd",
  "--enable",
  "threads",
  "--importMemory",
  "--sharedMemory",
  "--initialMemory",
  "1",
  "--maximumMemory",
  "32768",
];

async function sources() {
  const names = await readdir(join(root, "src"), { recursive: true });
  return names
    .filter((name) => name.endsWith(".as.ts"))
    .sort()
    .map((name) => join(root, "src", name));
}

async function changedAt(path) {
  return (await stat(path).catch(() => undefined))?.mtimeMs ?? 0;
}

async function isUpToDate(files) {
  const built = await changedAt(module);
  for (const file of [...files, fileURLToPath(import.meta.url)]) {
    if ((await changedAt(file)) >= built) return false;
  }
  return true;
}

/** Written beside and renamed, so that whoever reads meanwhile finds a whole module. */
async function replace(path, bytes) {
  const beside = `${path}.${process.pid}.tmp`;
  await writeFile(beside, bytes);
  await rename(beside, path);
}

async function compile(files) {
  const { default: asc } = await import("assemblyscript/asc");
  let binary;
  const said = asc.createMemoryStream();
  const entries = files.map((file) => relative(root, file));
  const { error } = await asc.main([...entries, "--baseDir", root, "--outFile", "kernels.wasm", ...OPTIONS], {
    stdout: said,
    stderr: said,
    writeFile: (_, contents) => {
      binary = contents;
    },
  });
  const text = said.toString();
  if (text !== "") process.stderr.write(text);
  if (error !== null) throw error;
  await replace(module, binary);
}

const files = await sources();
if (!(await isUpToDate(files))) await compile(files);
for (const copy of process.argv.slice(2)) {
  await mkdir(dirname(copy), { recursive: true });
  const beside = `${copy}.${process.pid}.tmp`;
  await copyFile(module, beside);
  await rename(beside, copy);
}
