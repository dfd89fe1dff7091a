import { rm } from 'node:fs/promises';
import { openEmbeddedStore } from '../../src/store/embedded/embedded-store.js';
import { makeStoreFolder } from '../support/store-folder.js';
import { resultStoreSuite } from './result-store.suite.js';

resultStoreSuite('embedded in a folder', async () => {
  const folder = makeStoreFolder();
  return {
    open: () => openEmbeddedStore({ folder }),
    end: () => rm(folder, { recursive: true, force: true }),
  };
});
