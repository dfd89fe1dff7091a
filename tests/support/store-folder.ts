/** A folder for an embedded store. */
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
