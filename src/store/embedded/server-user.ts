/**
 * Who the database server runs as. PostgreSQL refuses to run as root, so a root process hands the server's files to another user and
 * starts the server as that user; any other process runs it as itself.
 */
import { spawnSync } from 'node:child_process';

/** null: the user of this process */
export type ServerUser = { readonly uid: number; readonly gid: number } | null;

/** 'nobody' of every common system: a user without rights of its own. */
const UNPRIVILEGED = 65534;

export const isRoot = (): boolean => process.getuid?.() === 0;

/** For a store that is new. */
export const newServerUser = (): ServerUser => (isRoot() ? { uid: UNPRIVILEGED, gid: UNPRIVILEGED } : null);

/** Options of spawn for a program of the server: its user, a folder every user can enter, and nothing of PG* or LC_* from outside. */
export function spawnAs(user: ServerUser) {
  return {
    cwd: '/',
    env: { PATH: process.env.PATH ?? '/usr/bin:/bin', LC_ALL: 'C', TZ: 'UTC' },
    ...(user ?? {}),
  } as const;
}

/** Asks the system itself, so that access lists and mount options count as well. */
export function canRead(path: string, user: ServerUser): boolean {
  return spawnSync('/bin/sh', ['-c', 'test -r "$0" && test -x "$0"', path], { ...spawnAs(user), stdio: 'ignore' }).status === 0;
}
