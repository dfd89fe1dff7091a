/** The schema of a database as text: every table with its columns, constraints and indexes, every view with its columns, in a fixed order. */
import type { TestDatabase } from './database.js';

export async function describeSchema(database: TestDatabase): Promise<string> {
  const tables = await database.query<{ name: string }>(
    `select c.relname as name from pg_class c where c.relnamespace = 'windrow'::regnamespace and c.relkind = 'r' order by 1`,
  );
  const parts: string[] = [];
  for (const { name } of tables) {
    const table = `windrow.${name}`;
    const columns = await database.query<{ line: string }>(
      `select a.attname || ' ' || format_type(a.atttypid, a.atttypmod) || case when a.attnotnull then ' not null' else '' end
         || coalesce(' default ' || pg_get_expr(d.adbin, d.adrelid), '') as line
       from pg_attribute a left join pg_attrdef d on d.adrelid = a.attrelid and d.adnum = a.attnum
       where a.attrelid = $1::regclass and a.attnum > 0 and not a.attisdropped order by a.attnum`,
      [table],
    );
    // Newer servers also list NOT NULL, which the columns show.
    const constraints = await database.query<{ line: string }>(
      `select 'constraint ' || conname || ' ' || pg_get_constraintdef(oid) as line from pg_constraint
       where conrelid = $1::regclass and contype <> 'n' order by conname`,
      [table],
    );
    const indexes = await database.query<{ line: string }>(
      `select pg_get_indexdef(i.indexrelid) || ';' as line from pg_index i
       where i.indrelid = $1::regclass and not exists (select from pg_constraint where conindid = i.indexrelid) order by 1`,
      [table],
    );
    const body = [...columns, ...constraints].map(({ line }) => `  ${line}`).join(',\n');
    parts.push([`create table ${table} (\n${body}\n);`, ...indexes.map(({ line }) => line)].join('\n'));
  }
  const views = await database.query<{ name: string; columns: string }>(
    `select c.relname as name, string_agg('  ' || a.attname || ' ' || format_type(a.atttypid, a.atttypmod), E',\\n' order by a.attnum) as columns
     from pg_class c join pg_attribute a on a.attrelid = c.oid and a.attnum > 0
     where c.relnamespace = 'windrow'::regnamespace and c.relkind = 'v' group by 1 order by 1`,
  );
  parts.push(...views.map(({ name, columns }) => `view windrow.${name} (\n${columns}\n);`));
  return `${parts.join('\n\n')}\n`;
}
