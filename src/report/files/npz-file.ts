/**
 * A sweep as NumPy .npz: the spectral measures and the numbers of the cells, an array a column.
 *
 * | arrays | length | |
 * | --- | --- | --- |
 * | `windrow` | a text | the metadata as JSON |
 * | `points/…` | grid points | ordinal, id, size, coupling, coordinates/AXIS, every field of a point, <φ|ψ> |
 * | `points/first_level` | grid points + 1 | levels of point i are first_level[i] to first_level[i + 1] |
 * | `levels/…` | all levels | energies, weights, overlap_re, overlap_im |
 * | `cells/…` | cells | point (its index in `points`), question, budget, efficiency, every field of a cell, status, flags, id |
 *
 * Numbers are float64, bit for bit those of the store, NaN where there is none; indices are int64; ids are bytes, other texts unicode.
 * The same content gives the same bytes. Columns are gathered in memory: some 0.4 kB a cell and 32 bytes a level.
 */
import type { Writable } from 'node:stream';
import { Zip, ZipPassThrough } from 'fflate';
import { WindrowError } from '../../core/errors.js';
import type { Json } from '../../core/json.js';
import type { MeasuredPoint } from '../../spectral/types.js';
import type { CellRow } from '../../store/types.js';
import { CELL_FIELDS, type FieldDeclaration, POINT_FIELDS } from '../../sweep/fields.js';
import { writeBytes } from './bytes.js';
import { METADATA_KEY } from './export-metadata.js';
import { asciiArray, doublesArray, joinedDoubles, type NpyArray, npyHeader, textArray, textScalar, wholeArray } from './npy.js';

export type ReadMeasures = (ids: readonly string[]) => Promise<ReadonlyMap<string, MeasuredPoint>>;

/** Measures read at once. */
const CHUNK = 200;
/** A zip archive without its 64-bit extension, which fflate does not write. */
const MOST_BYTES = 2 ** 32 - 2 ** 20;
/** Archives hold no time, so that the same content gives the same bytes. */
const NO_TIME = new Date(1980, 0, 1);

type Arrays = Map<string, NpyArray>;
type Value = number | string | null;

type Kind = 'double' | 'whole' | 'text' | 'ascii' | 'place';

/** @param kind `place` is numbers where all values are, and texts otherwise */
function arrayOf(kind: Kind, values: readonly Value[]): NpyArray {
  switch (kind) {
    case 'double':
      return doublesArray(values as (number | null)[]);
    case 'whole':
      return wholeArray(values as number[]);
    case 'ascii':
      return asciiArray(values as string[]);
    case 'text':
      return textArray(values.map((value) => String(value ?? '')));
    case 'place':
      return arrayOf(values.every((value) => typeof value === 'number') ? 'double' : 'text', values);
  }
}

interface Column {
  readonly name: string;
  readonly kind: Kind;
  readonly value: (row: CellRow) => Value;
}

/** Columns that grow row by row, since rows as objects would take several times the memory. */
class Gathered {
  readonly #columns: readonly (Column & { readonly values: Value[] })[];

  constructor(columns: readonly Column[]) {
    this.#columns = columns.map((column) => ({ ...column, values: [] }));
  }

  add(row: CellRow): void {
    // NaN for null keeps the values of a column doubles, not objects.
    for (const { kind, value, values } of this.#columns) values.push(value(row) ?? (kind === 'double' ? NaN : null));
  }

  into(arrays: Arrays): void {
    for (const { name, kind, values } of this.#columns) arrays.set(name, arrayOf(kind, values));
  }
}

function fieldColumns(room: 'points' | 'cells', fields: readonly FieldDeclaration[]): Column[] {
  const source = room === 'points' ? (row: CellRow) => row.point : (row: CellRow) => row.fields;
  return fields.map(({ name, type }) => ({
    name: `${room}/${name}`,
    kind: type === 'text' ? 'text' : 'double',
    value: (row) => (source(row) as Record<string, Value> | null)?.[name] ?? null,
  }));
}

const pointColumns = (axes: readonly string[]): Column[] => [
  { name: 'points/ordinal', kind: 'whole', value: ({ ordinal }) => ordinal },
  { name: 'points/id', kind: 'ascii', value: ({ pointId }) => pointId },
  { name: 'points/size', kind: 'whole', value: ({ spec }) => spec.size },
  { name: 'points/coupling', kind: 'double', value: ({ spec }) => spec.coupling },
  ...axes.map((axis): Column => ({ name: `points/coordinates/${axis}`, kind: 'place', value: ({ coordinates }) => coordinates[axis] })),
  ...fieldColumns('points', POINT_FIELDS),
];

const CELL_COLUMNS: readonly Column[] = [
  { name: 'cells/question', kind: 'whole', value: ({ questionOrdinal }) => questionOrdinal },
  { name: 'cells/budget', kind: 'whole', value: ({ question }) => question.budget },
  { name: 'cells/efficiency', kind: 'double', value: ({ question }) => question.detector.efficiency },
  ...fieldColumns('cells', CELL_FIELDS),
  { name: 'cells/status', kind: 'text', value: ({ fields, failure }) => (fields ? 'computed' : failure ? 'failed' : 'missing') },
  {
    name: 'cells/flags',
    kind: 'text',
    value: ({ point, fields }) => [...new Set([...(point?.flags ?? []), ...(fields?.flags ?? [])])].join(' '),
  },
  { name: 'cells/id', kind: 'ascii', value: ({ cellId }) => cellId ?? '' },
];

/** @param measured ids of the points in their order, null where a point has no measure */
async function levelsInto(arrays: Arrays, measured: readonly (string | null)[], read: ReadMeasures): Promise<void> {
  const found: (MeasuredPoint | null)[] = [];
  for (let from = 0; from < measured.length; from += CHUNK) {
    const chunk = measured.slice(from, from + CHUNK);
    const measures = await read(chunk.filter((id) => id !== null));
    for (const id of chunk) found.push(id === null ? null : (measures.get(id) ?? null));
  }
  const first = [0];
  for (const point of found) first.push(first[first.length - 1] + (point?.measure.energies.length ?? 0));
  const present = found.flatMap((point) => point?.measure ?? []);
  arrays.set('points/state_overlap_re', doublesArray(found.map((point) => point?.overlap[0] ?? null)));
  arrays.set('points/state_overlap_im', doublesArray(found.map((point) => point?.overlap[1] ?? null)));
  arrays.set('points/first_level', wholeArray(first));
  arrays.set('levels/energies', joinedDoubles(present.map(({ energies }) => energies)));
  arrays.set('levels/weights', joinedDoubles(present.map(({ weights }) => weights)));
  arrays.set('levels/overlap_re', joinedDoubles(present.map(({ overlapRe }) => overlapRe)));
  arrays.set('levels/overlap_im', joinedDoubles(present.map(({ overlapIm, energies }) => overlapIm ?? new Float64Array(energies.length))));
}

const sizeOf = (array: NpyArray): number => array.chunks.reduce((sum, { length }) => sum + length, 0);

/** The arrays as members of an uncompressed archive, as NumPy's own `savez` writes them. */
async function writeArchive(arrays: Arrays, out: Writable): Promise<void> {
  const bytes = [...arrays.values()].reduce((sum, array) => sum + sizeOf(array), 0);
  if (bytes > MOST_BYTES) {
    throw new WindrowError('report.unwritable', 'too large for an .npz archive', {
      found: `${bytes} bytes`,
      allowed: 'less than 4 GiB; choose questions with --question, or --as parquet',
    });
  }
  let ready: Uint8Array[] = [];
  const archive = new Zip((error, data) => {
    if (error) throw error;
    ready.push(data);
  });
  const flush = async (): Promise<void> => {
    const pieces = ready;
    ready = [];
    for (const piece of pieces) await writeBytes(out, piece);
  };
  for (const [name, array] of arrays) {
    const member = new ZipPassThrough(`${name}.npy`);
    member.mtime = NO_TIME;
    archive.add(member);
    member.push(npyHeader(array), array.chunks.length === 0);
    for (const [index, chunk] of array.chunks.entries()) {
      member.push(chunk, index === array.chunks.length - 1);
      await flush();
    }
  }
  archive.end();
  await flush();
}

export interface NpzSource {
  /** in the grid's order */
  readonly rows: AsyncIterable<CellRow>;
  /** names of the sweep's axes */
  readonly axes: readonly string[];
  readonly measures: ReadMeasures;
  /** asked for after the last row */
  readonly metadata: () => Json;
}

/**
 * Resolves when everything is handed to `out`, which stays open.
 * @throws report.unwritable from 4 GiB on
 */
export async function writeNpz({ rows, axes, measures, metadata }: NpzSource, out: Writable): Promise<void> {
  const points = new Gathered(pointColumns(axes));
  const cells = new Gathered(CELL_COLUMNS);
  const places: number[] = [];
  // Stored measures never change, so those of the points that the rows show belong to the rows' snapshot.
  const measured: (string | null)[] = [];
  let last = -1;
  for await (const row of rows) {
    if (row.ordinal !== last) {
      points.add(row);
      measured.push(row.point === null ? null : row.pointId);
      last = row.ordinal;
    }
    cells.add(row);
    places.push(measured.length - 1);
  }
  const arrays: Arrays = new Map([[METADATA_KEY, textScalar(JSON.stringify(metadata()))]]);
  points.into(arrays);
  await levelsInto(arrays, measured, measures);
  arrays.set('cells/point', wholeArray(places));
  cells.into(arrays);
  await writeArchive(arrays, out);
}
