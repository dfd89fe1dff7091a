/** Folders for tests of the embedded store, removed after each test. */
import { rmSync } from 'node:fs';
import { afterAll, afterEach, beforeAll } from 'vitest';
import { openEmbeddedStore } from '../../src/store/embedded/embedded-store.js';
import { copyOfStore, makeStoreFolder } from './store-folder.js';

export interface StoreFolders {
  /** With a store in it, that nobody has open. */
  readonly storeFolder: () => string;
  readonly emptyFolder: () => string;
}

/** Registers its hooks in the file (or suite) that calls it; one initdb serves all its tests. */
export function storeFolders(): StoreFolders {
  const folders: string[] = [];
  let template: string;
  const kept = (folder: string): string => {
    folders.push(folder);
    return folder;
  };
  beforeAll(async () => {
    template = makeStoreFolder();
    await (await openEmbeddedStore({ folder: template })).close();
  });
  afterAll(() => rmSync(template, { recursive: true, force: true }));
  afterEach(() => {
    for (const folder of folders.splice(0)) rmSync(folder, { recursive: true, force: true });
  });
  return { storeFolder: () => kept(copyOfStore(template)), emptyFolder: () => kept(makeStoreFolder()) };
}
