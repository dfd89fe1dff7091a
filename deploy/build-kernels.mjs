/**
 * Compiles the WebAssembly kernels (src/linalg/wasm/assembly, AssemblyScript) into src/linalg/wasm/binary.ts, which holds them as text, so
 * that they are found the same way from source, from dist, in a worker thread and in a browser. The file is not kept under version control.
 *
 * Does nothing where the file was made from these sources by this compiler. The new file takes the place of the old one at once, so a
 * reader never sees half of it. Prints one line on stderr when it compiles.
 *
 * Usage: node deploy/build-kernels.mjs
 * Exit status: 0 up to date or compiled, 1 the compilation failed.
 */
import { createHash } from 'node:crypto';
import { existsSync, readFileSync, readdirSync, renameSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

const room = fileURLToPath(new URL('../src/linalg/wasm/', import.meta.url));
const assembly = join(room, 'assembly');
const output = join(room, 'binary.ts');
const compiler = fileURLToPath(new URL('../node_modules/assemblyscript/package.json', import.meta.url));
const OPTIONS = ['-O3', '--runtime', 'stub', '--noAssert', '--enable', 'simd', '--initialMemory', '1'];

const sources = readdirSync(assembly)
  .filter((name) => name.endsWith('.ts'))
  .sort();

function digestOfSources() {
  const hash = createHash('sha256').update(JSON.stringify([OPTIONS, JSON.parse(readFileSync(compiler, 'utf8')).version]));
  for (const path of [fileURLToPath(import.meta.url), ...sources.map((name) => join(assembly, name))]) {
    hash.update(readFileSync(path)).update('\0');
  }
  return hash.digest('hex');
}

async function compile() {
  const { default: asc } = await import('assemblyscript/asc');
  let binary;
  const { error, stderr } = await asc.main(['index.ts', '--outFile', 'kernels.wasm', ...OPTIONS], {
    readFile: (name) => {
      const path = join(assembly, name);
      return existsSync(path) ? readFileSync(path, 'utf8') : null;
    },
    writeFile: (name, contents) => {
      if (name === 'kernels.wasm') binary = Buffer.from(contents);
    },
    listFiles: () => [],
  });
  if (error === null && binary !== undefined) return binary;
  process.stderr.write(stderr.toString());
  throw new Error(error?.message ?? 'the compiler wrote nothing');
}

const stamp = `// sources ${digestOfSources()}`;
if (!existsSync(output) || !readFileSync(output, 'utf8').includes(stamp)) {
  console.error('windrow: compiling the kernels');
  try {
    const binary = await compile();
    const text = [
      '/** The compiled kernels of ./assembly in base64; written by deploy/build-kernels.mjs. */',
      stamp,
      'export const SIMD_BINARY =',
      `  '${binary.toString('base64')}';`,
    ];
    const written = `${output}.${process.pid}`;
    writeFileSync(written, `${text.join('\n')}\n`);
    renameSync(written, output);
  } catch (error) {
    console.error(`windrow: the kernels could not be compiled: ${error.message}`);
    process.exitCode = 1;
  }
}
