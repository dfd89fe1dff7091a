/** A folder for an embedded store. */
import { spawnSync } from 'node:child_process';
import { chmodSync, mkdtempSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';

/**
 * New, empty, below the system's folder for temporary files. As root the server runs as another user; unlike a plain temporary folder
 * this one lets it in, so that the data stay inside and go with the folder.
 */
export function makeStoreFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), 'windrow-store-'));
  chmodSync(folder, 0o755);
  return folder;
}

/** A copy of an embedded store that nobody has open: faster than making one. */
export function copyOfStore(store: string): string {
  const folder = makeStoreFolder();
  const { status, stderr } = spawnSync('cp', ['-a', `${store}/.`, folder], { encoding: 'utf8' });
  if (status !== 0) throw new Error(stderr);
  return folder;
}
