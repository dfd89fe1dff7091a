import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { CELL_FIELDS, FLAG_FIELDS, POINT_FIELDS, type FieldDeclaration } from '../../src/sweep/fields.js';
import { createDatabase, type TestDatabase } from '../support/database.js';
import { describeSchema } from '../support/describe-schema.js';

describe('schema', () => {
  let database: TestDatabase;
  beforeAll(async () => {
    database = await createDatabase();
  });
  afterAll(() => database.drop());

  it('is the one kept in schema.sql; after a new migration: vitest -u, and read the difference', async () => {
    await expect(await describeSchema(database)).toMatchFileSnapshot('schema.sql');
  });

  it.each([
    ['measure', [...POINT_FIELDS, ...FLAG_FIELDS]],
    ['cell', [...CELL_FIELDS, ...FLAG_FIELDS]],
  ] as [string, FieldDeclaration[]][])('%s has a column for every declared field, of its type and nullability', async (table, fields) => {
    const columns = await database.query<{ name: string; type: string; nullable: boolean }>(
      `select attname as name, format_type(atttypid, atttypmod) as type, not attnotnull as nullable
       from pg_attribute where attrelid = $1::regclass and attnum > 0`,
      [`windrow.${table}`],
    );
    const types = { float: 'double precision', integer: 'double precision', text: 'text', list: 'text[]' };
    const declared = fields.map(({ name, type, nullable }) => ({ name, type: types[type], nullable }));
    expect(columns).toEqual(expect.arrayContaining(declared));
  });
});
