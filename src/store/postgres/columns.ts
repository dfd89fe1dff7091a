/**
 * The field table as SQL columns: what is written, what is selected, and how a row becomes fields again.
 *
 * A column exists for every declared field and carries its name; tests hold the schema against the table.
 */
import type { PointFields } from '../../spectral/types.js';
import type { CellFields } from '../../statistics/types.js';
import { CELL_FIELDS, FLAG_FIELDS, POINT_FIELDS, type FieldDeclaration } from '../../sweep/fields.js';
import { doubleColumn, listColumn, textColumn, type Column } from './insert.js';

type FieldValue = number | string | readonly string[] | null;

const POINT_COLUMNS: readonly FieldDeclaration<keyof PointFields>[] = [...POINT_FIELDS, ...FLAG_FIELDS];
const CELL_COLUMNS: readonly FieldDeclaration<keyof CellFields>[] = [...CELL_FIELDS, ...FLAG_FIELDS];

function writing<Row>(fields: readonly FieldDeclaration[], of: (row: Row) => Record<string, FieldValue>): readonly Column<Row>[] {
  return fields.map(({ name, type }) => {
    if (type === 'list') return listColumn<Row>(name, (row) => of(row)[name] as readonly string[]);
    if (type === 'text') return textColumn<Row>(name, (row) => of(row)[name] as string | null);
    return doubleColumn<Row>(name, (row) => of(row)[name] as number | null);
  });
}

export const pointColumns = <Row>(of: (row: Row) => PointFields): readonly Column<Row>[] =>
  writing<Row>(POINT_COLUMNS, (row) => of(row) as unknown as Record<string, FieldValue>);

export const cellColumns = <Row>(of: (row: Row) => CellFields): readonly Column<Row>[] =>
  writing<Row>(CELL_COLUMNS, (row) => of(row) as unknown as Record<string, FieldValue>);

/** Reads consecutive values of a row, which were selected in the order of `list`. */
export interface FieldReader<Fields> {
  /** for a select list */
  list(alias: string): string;
  readonly length: number;
  read(row: readonly unknown[], offset: number): Fields;
}

function reading<Fields>(fields: readonly FieldDeclaration[]): FieldReader<Fields> {
  return {
    list: (alias) => fields.map(({ name }) => `${alias}.${name}`).join(', '),
    length: fields.length,
    read: (row, offset) => Object.fromEntries(fields.map(({ name }, index) => [name, row[offset + index]])) as Fields,
  };
}

export const pointReader: FieldReader<PointFields> = reading(POINT_COLUMNS);
export const cellReader: FieldReader<CellFields> = reading(CELL_COLUMNS);
