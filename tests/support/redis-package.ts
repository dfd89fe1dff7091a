/**
 * Redis from the packages of Debian and Ubuntu, without installing it: downloaded with what it needs beyond the machine's own
 * libraries, unpacked into a cache folder, kept there for the next run. Needs no root and changes nothing of the system.
 */
import { spawnSync } from 'node:child_process';
import { existsSync, mkdirSync, mkdtempSync, readdirSync, renameSync, rmSync } from 'node:fs';
import { homedir } from 'node:os';
import { dirname, join } from 'node:path';

export interface RedisProgram {
  readonly path: string;
  readonly env: Readonly<Record<string, string>>;
}

function run(command: string, args: readonly string[]): boolean {
  return (
    spawnSync(command, args, { stdio: 'ignore', timeout: 120_000, env: { ...process.env, LC_ALL: 'C', DEBIAN_FRONTEND: 'noninteractive' } })
      .status === 0
  );
}

function program(folder: string): RedisProgram | null {
  const path = join(folder, 'usr', 'bin', 'redis-server');
  if (!existsSync(path)) return null;
  const libraries = join(folder, 'usr', 'lib');
  // Libraries lie in a folder named after the machine's architecture, e.g. x86_64-linux-gnu.
  const folders = existsSync(libraries) ? readdirSync(libraries).filter((name) => name.includes('-linux-')) : [];
  const found: RedisProgram = { path, env: { LD_LIBRARY_PATH: folders.map((name) => join(libraries, name)).join(':') } };
  const started = spawnSync(path, ['--version'], { stdio: 'ignore', env: { ...process.env, ...found.env } });
  return started.status === 0 ? found : null;
}

/** apt with folders of its own: another one at work, or an account that may not write the system's, is no hindrance. */
function download(folder: string): boolean {
  const archives = join(folder, 'archives');
  const lists = join(folder, 'lists');
  mkdirSync(join(archives, 'partial'), { recursive: true });
  mkdirSync(join(lists, 'partial'), { recursive: true });
  const own = ['-o', `Dir::Cache=${folder}`, '-o', 'Debug::NoLocking=1', '-o', 'APT::Sandbox::User='];
  const want = ['-y', '--download-only', '--no-install-recommends', 'install', 'redis-server'];
  if (run('apt-get', [...own, ...want])) return true;
  // A bare image carries no package lists, or stale ones.
  own.push('-o', `Dir::State::lists=${lists}`);
  return run('apt-get', [...own, 'update']) && run('apt-get', [...own, ...want]);
}

/** The cached program, unpacked first where it is not; null off Debian and Ubuntu or without their package servers. */
export function unpackRedis(): RedisProgram | null {
  if (process.platform !== 'linux' || !existsSync('/usr/bin/apt-get')) return null;
  const cache = join(process.env.XDG_CACHE_HOME ?? join(homedir(), '.cache'), 'windrow-tests', `redis-${process.arch}`);
  if (existsSync(cache)) {
    const cached = program(cache);
    if (cached !== null) return cached;
    rmSync(cache, { recursive: true, force: true });
  }
  mkdirSync(dirname(cache), { recursive: true });
  const fresh = mkdtempSync(`${cache}-`);
  try {
    const packages = join(fresh, 'packages');
    if (!download(packages)) return null;
    const root = join(fresh, 'root');
    for (const name of readdirSync(join(packages, 'archives')).filter((name) => name.endsWith('.deb'))) {
      if (!run('dpkg', ['-x', join(packages, 'archives', name), root])) return null;
    }
    if (program(root) === null) return null;
    // Other test processes do the same at the same time; the first to finish provides, and its folder is as good as this one.
    try {
      renameSync(root, cache);
    } catch {
      // provided in between
    }
    return program(cache);
  } finally {
    rmSync(fresh, { recursive: true, force: true });
  }
}
