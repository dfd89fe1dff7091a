/**
 * Makes a clone ready to run: `npm start` and `npm test` call it first (`prestart`, `pretest` in package.json).
 *
 * It needs Node and npm only, no package. It installs what package-lock.json names when node_modules differs from it, and compiles
 * when a source differs from what dist was compiled from; when nothing is to be done it prints nothing. Two calls at once wait for
 * each other. Install scripts are switched off, as nothing here needs one: the same files land with every npm, whatever it blocks.
 *
 * Usage: node deploy/prepare.mjs start|test
 * Exit status: 0 ready, 1 the installation or the compilation failed, 2 wrong usage or a Node that is too old.
 */
import { spawnSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { closeSync, existsSync, mkdirSync, openSync, readFileSync, readdirSync, rmSync, statSync, writeFileSync, writeSync } from 'node:fs';
import { join, relative } from 'node:path';
import { fileURLToPath } from 'node:url';

const LEAST_NODE = [20, 19];
const root = fileURLToPath(new URL('..', import.meta.url));
const at = (...path) => join(root, ...path);
const lockFile = at('.cache', 'prepare.lock');
const stampFile = at('dist', '.sources');

class Failure extends Error {
  constructor(message, exit = 1) {
    super(message);
    this.exit = exit;
  }
}

function checkNode() {
  const [major, minor] = process.versions.node.split('.').map(Number);
  if (major > LEAST_NODE[0] || (major === LEAST_NODE[0] && minor >= LEAST_NODE[1])) return;
  throw new Failure(`windrow needs Node ${LEAST_NODE.join('.')} or newer; this is Node ${process.versions.node} (${process.execPath})`, 2);
}

/** Is the process with this id alive? A process of another user counts as alive. */
function alive(pid) {
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return error.code === 'EPERM';
  }
}

/** Takes the lock that keeps two preparations of one clone apart; a lock left behind by a killed process is broken. */
async function lock() {
  mkdirSync(at('.cache'), { recursive: true });
  for (let told = false; ; await new Promise((resolve) => setTimeout(resolve, 200))) {
    try {
      const file = openSync(lockFile, 'wx');
      writeSync(file, String(process.pid));
      closeSync(file);
      return;
    } catch (error) {
      if (error.code !== 'EEXIST') throw error;
    }
    let holder, age;
    try {
      holder = Number(readFileSync(lockFile, 'utf8'));
      age = Date.now() - statSync(lockFile).mtimeMs;
    } catch {
      continue; // released in between
    }
    // An empty lock is one whose maker has not written its id yet, or never will.
    if (holder > 0 ? !alive(holder) : age > 5000) rmSync(lockFile, { force: true });
    else if (!told) {
      told = true;
      console.error(`windrow: another preparation of this folder is running (process ${holder}); waiting for it`);
    }
  }
}

/** The first package whose installed version is not the locked one; null where node_modules agrees with package-lock.json. */
function firstMissing() {
  let installed;
  try {
    installed = JSON.parse(readFileSync(at('node_modules', '.package-lock.json'), 'utf8')).packages;
  } catch {
    return 'node_modules';
  }
  const wanted = JSON.parse(readFileSync(at('package-lock.json'), 'utf8')).packages;
  for (const [path, entry] of Object.entries(wanted)) {
    if (path === '') continue;
    // An optional package may be absent: it is for another platform, or the user left it out.
    if (installed[path] === undefined ? !entry.optional : installed[path].version !== entry.version) return path;
  }
  return null;
}

/** Runs npm: the one that started this script where there is one, else the one on the PATH. */
function npm(...args) {
  const own = process.env.npm_execpath;
  const options = { cwd: root, stdio: ['ignore', 'inherit', 'inherit'] };
  return own !== undefined && /npm-cli\.c?js$/.test(own)
    ? spawnSync(process.execPath, [own, ...args], options)
    : spawnSync('npm', args, { ...options, shell: process.platform === 'win32' });
}

function install() {
  const missing = firstMissing();
  if (missing === null) return;
  console.error(`windrow: installing the packages of package-lock.json (${missing} is missing or differs)`);
  // The compiler is a development dependency; NODE_ENV=production would leave it out.
  const result = npm('ci', '--include=dev', '--ignore-scripts', '--no-audit', '--no-fund', '--loglevel=error');
  if (result.error) throw new Failure(`npm could not be run: ${result.error.message}`);
  if (result.status !== 0) throw new Failure('npm ci failed; its message is above');
}

function* filesBelow(folder) {
  for (const entry of readdirSync(folder, { withFileTypes: true })) {
    const path = join(folder, entry.name);
    if (entry.isDirectory()) yield* filesBelow(path);
    else if (entry.isFile()) yield path;
  }
}

/** Digest of everything that decides what dist holds. Content, not file times: a checkout or a copied folder changes those freely. */
function sourceDigest() {
  const hash = createHash('sha256');
  const sources = ['src', 'workers'].filter((folder) => existsSync(at(folder))).flatMap((folder) => [...filesBelow(at(folder))]);
  for (const path of [at('tsconfig.json'), at('package.json'), ...sources.sort()]) {
    hash
      .update(`${relative(root, path)}\0`)
      .update(readFileSync(path))
      .update('\0');
  }
  return hash.digest('hex');
}

/** The kernels are a source of the compilation, so they come first; a project without any has no script for them. */
function buildKernels() {
  const script = at('deploy', 'build-kernels.mjs');
  if (!existsSync(script)) return;
  if (spawnSync(process.execPath, [script], { cwd: root, stdio: ['ignore', 2, 2] }).status !== 0) {
    throw new Failure('the kernels could not be compiled; the messages are above');
  }
}

function build() {
  buildKernels();
  const digest = sourceDigest();
  const built = existsSync(stampFile) ? readFileSync(stampFile, 'utf8') : null;
  if (built === digest) return;
  console.error('windrow: compiling');
  // The incremental compiler believes its own record; without the output that the record speaks of, it would write nothing.
  if (built === null) rmSync(at('.cache', 'build.tsbuildinfo'), { force: true });
  rmSync(stampFile, { force: true });
  const result = spawnSync(process.execPath, [at('node_modules', 'typescript', 'bin', 'tsc'), '-p', at('tsconfig.json')], {
    cwd: root,
    stdio: ['ignore', 2, 2],
  });
  if (result.status !== 0) throw new Failure('the compilation failed; the messages are above');
  removeStale();
  writeFileSync(stampFile, digest);
}

/** Takes compiled files out of dist whose source is gone, so that dist is what a fresh compilation would write. */
function removeStale() {
  for (const path of filesBelow(at('dist'))) {
    const source = at(relative(at('dist'), path)).replace(/\.js(\.map)?$/, '.ts');
    if (path !== stampFile && !existsSync(source)) rmSync(path);
  }
}

const [purpose, ...rest] = process.argv.slice(2);
try {
  checkNode();
  if (!['start', 'test'].includes(purpose) || rest.length > 0) throw new Failure('usage: node deploy/prepare.mjs start|test', 2);
  await lock();
  try {
    install();
    build();
  } finally {
    rmSync(lockFile, { force: true });
  }
} catch (error) {
  if (!(error instanceof Failure) && error.code === undefined) throw error;
  console.error(`windrow: ${error.message}`);
  process.exitCode = error.exit ?? 1;
}
