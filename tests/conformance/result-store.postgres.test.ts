import { createDatabase } from '../support/database.js';
import { resultStoreSuite } from './result-store.suite.js';

resultStoreSuite('PostgreSQL by URL', async () => {
  const database = await createDatabase();
  return { open: () => database.open(), end: () => database.drop() };
});
