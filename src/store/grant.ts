/**
 * Two roles for a database that several people and machines use: `windrow_writer` computes, `windrow_reader` only looks. Neither can
 * log in; whoever runs the server makes logins and puts them into a role: `create role ada login in role windrow_reader`.
 *
 * Guarantees: one transaction; safe to repeat and to run in many processes at once. A role has what windrow's statements need and
 * nothing else: not even the writer can change the schema, or a result once it is stored. Roles belong to the whole server, rights to
 * this database.
 */
import type { ClientBase } from 'pg';
import type { StoreRoles } from './types.js';

export const ROLES: StoreRoles = { writer: 'windrow_writer', reader: 'windrow_reader' };

/** Of the advisory lock, as roles are made one process at a time; not that of the migrations, which may be held at the time. */
const LOCK = 7_460_913_582_202;

/** On top of what the reader has. `select … for update` asks for the right to update. */
const WRITER_RIGHTS = [
  `grant insert on all tables in schema windrow to ${ROLES.writer}`,
  `revoke insert on windrow.migration from ${ROLES.writer}`,
  `alter default privileges in schema windrow grant insert on tables to ${ROLES.writer}`,
  `grant update (state, updated) on windrow.sweep to ${ROLES.writer}`,
  `grant update, delete on windrow.failure to ${ROLES.writer}`,
];

const RIGHTS = [ROLES.reader, ROLES.writer].flatMap((role) => [
  `grant usage on schema windrow to ${role}`,
  `grant select on all tables in schema windrow to ${role}`,
  // Tables of later migrations by the same owner.
  `alter default privileges in schema windrow grant select on tables to ${role}`,
]);

/**
 * @param client inside a transaction, as the owner of the schema; making the roles needs CREATEROLE, where they do not exist yet
 * @throws what the server answers where a right is missing
 */
export async function grantRoles(client: ClientBase): Promise<StoreRoles> {
  await client.query('select pg_advisory_xact_lock($1)', [LOCK]);
  const { rows } = await client.query<{ name: string }>('select rolname as name from pg_roles where rolname = any($1)', [
    [ROLES.writer, ROLES.reader],
  ]);
  const present = new Set(rows.map(({ name }) => name));
  for (const role of [ROLES.writer, ROLES.reader]) if (!present.has(role)) await client.query(`create role ${role} nologin`);
  for (const statement of [...RIGHTS, ...WRITER_RIGHTS]) await client.query(statement);
  return ROLES;
}
