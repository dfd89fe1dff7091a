/**
 * Errors: one catalogue of stable codes, one class that carries them.
 *
 * Every failure a user can meet has an entry here: its exit status and whether trying again can help. A message says what was
 * found, where, and what is allowed. Programs match on `code`, never on the text. Entries are grouped by the room that throws them.
 *
 * `exit` is the process status of the command line: 1 failed, 2 wrong input. `retryable` marks faults of the infrastructure (a
 * server away, a lock taken), where the same job can succeed later; mathematical and input errors never are.
 */
export interface CatalogueEntry {
  readonly summary: string;
  readonly exit: 1 | 2;
  readonly retryable: boolean;
}

const input = (summary: string): CatalogueEntry => ({ summary, exit: 2, retryable: false });
const failure = (summary: string): CatalogueEntry => ({ summary, exit: 1, retryable: false });
const passing = (summary: string): CatalogueEntry => ({ summary, exit: 1, retryable: true });

export const CATALOGUE = {
  // core
  'settings.unknown': input('a setting that windrow does not know'),
  'settings.invalid': input('a setting outside its bounds'),
  'internal.invariant': failure('a condition that the program guarantees does not hold'),
  // linalg
  'matrix.not-hermitian': input('a Hamiltonian that differs from its conjugate transpose'),
  'matrix.dimension': input('dimensions that do not fit together'),
  'matrix.not-finite': input('a matrix element that is NaN or infinite'),
  'kernel.no-convergence': failure('the eigenvalue iteration did not converge'),
  // models
  'model.unknown': input('a model family that is not registered'),
  'model.parameter': input('a parameter that the family does not have or allow'),
  'model.size': input('a system size outside what the family allows'),
  'model.coupling': input('a coupling that is not a finite number, or a scale the family does not offer'),
  'state.unknown': input('a state name that the family does not have'),
  'state.invalid': input('a state that does not fit the system'),
  'point.too-large': failure('a Hamiltonian that does not fit into the memory limit'),
  // schedules and statistics
  'schedule.unknown': input('a schedule family that is not registered'),
  'schedule.parameter': input('a schedule parameter outside what the family allows'),
  'statistics.undetectable': failure('the detected state has no bright level'),
  // sweep
  'sweep.file': input('a sweep file that cannot be read'),
  'sweep.syntax': input('a sweep file that is not valid YAML or JSON'),
  'sweep.key': input('an unknown or missing key in a sweep file'),
  'sweep.value': input('a value in a sweep file that is not allowed'),
  'sweep.too-large': input('a grid larger than is run without being asked twice'),
  'sweep.unknown': input('a sweep that the store does not hold'),
  'sweep.differs': input('a sweep file that differs from the stored sweep of the same name'),
  // store
  'store.unreachable': passing('the store cannot be reached'),
  'store.refused': failure('the database refuses the user or a right, or is older than PostgreSQL 14'),
  'store.full': failure('the disk that holds the store is full or read-only'),
  'store.locked': passing('the store is in use in a way that excludes this command'),
  'store.schema-newer': failure('the store was written by a newer windrow with a breaking schema'),
  'store.schema-older': failure('the store needs its migrations'),
  'store.embedded': failure('the embedded store cannot be started'),
  'store.data': failure('a stored row that cannot be read back'),
  // queue
  'queue.unreachable': passing('the queue cannot be reached'),
  'queue.refused': failure('the queue server refuses the user or a right, or is older than Redis 6.2'),
  'queue.full': passing('the queue refuses jobs because its memory limit is reached'),
  'queue.payload': failure('a job that is not of the agreed form'),
  'queue.version': failure('a worker whose method version differs from the job'),
  'queue.incomplete': failure('jobs that ended without storing their results'),
  // analysis
  'analysis.field': input('a field that result rows do not have'),
  'analysis.axis': input('an axis, or a value on it, that the sweep does not have'),
  // command line
  'cli.usage': input('a command line that cannot be understood'),
  'report.unwritable': failure('a figure or export that cannot be written'),
} as const satisfies Record<string, CatalogueEntry>;

export type ErrorCode = keyof typeof CATALOGUE;

/** What a message refers to; printed by the command line, stored with failed points. */
export interface ErrorDetails {
  /** Where: a file, a key path, a row. */
  readonly where?: string;
  /** The line in that file, counted from 1. */
  readonly line?: number;
  /** The key path inside a document, e.g. `schedules[0].mean`. */
  readonly key?: string;
  readonly found?: string;
  readonly allowed?: string;
  readonly cause?: unknown;
}

export class WindrowError extends Error {
  readonly code: ErrorCode;
  readonly details: ErrorDetails;

  constructor(code: ErrorCode, message: string, details: ErrorDetails = {}) {
    super(message, details.cause === undefined ? undefined : { cause: details.cause });
    this.name = 'WindrowError';
    this.code = code;
    this.details = details;
  }

  get exit(): 1 | 2 {
    return CATALOGUE[this.code].exit;
  }

  get retryable(): boolean {
    return CATALOGUE[this.code].retryable;
  }
}
