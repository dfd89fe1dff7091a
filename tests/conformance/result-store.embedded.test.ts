import { chmod, mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { openEmbeddedStore } from '../../src/store/embedded/embedded-store.js';
import { resultStoreSuite } from './result-store.suite.js';

resultStoreSuite('embedded in a folder', async () => {
  const folder = await mkdtemp(join(tmpdir(), 'windrow-store-'));
  await chmod(folder, 0o755);
  return {
    open: () => openEmbeddedStore({ folder }),
    end: () => rm(folder, { recursive: true, force: true }),
  };
});
