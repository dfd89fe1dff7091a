/** Phase maps of a stored sweep as text, rows, a document and figures; `map` and the report of `sweep` share it. */
import type { Boundary } from '../analysis/boundary.js';
import { type PhaseMap, phaseMapsOf, valueRange } from '../analysis/phase-map.js';
import type { Quantity } from '../analysis/quantities.js';
import type { Json } from '../core/json.js';
import { panelTitle, quantityTitle, resolutionText } from '../report/labels.js';
import { pagesOf, phaseDiagramSpec } from '../report/phase-diagram.js';
import { colourDepth, figurePainter, type Paint } from '../report/terminal-colour.js';
import { renderTerminalMap } from '../report/terminal-map.js';
import type { ResultStore } from '../store/types.js';
import { boundariesOf, type BoundaryChoice } from './boundary-options.js';
import type { Context } from './context.js';
import { readSamples, REFINED_AXIS, type Selection, type StoredSweep } from './stored-sweep.js';

export interface MapView {
  readonly sweep: StoredSweep;
  readonly quantity: Quantity;
  readonly maps: readonly PhaseMap[];
  readonly boundaries: readonly Boundary[];
  readonly choice: BoundaryChoice;
  readonly axes: { readonly x: string; readonly y: string };
}

/** Columns of a terminal that does not tell its own. */
const WIDTH = 100;

export async function readMapView(
  store: ResultStore,
  sweep: StoredSweep,
  quantity: Quantity,
  choice: BoundaryChoice,
  axes: MapView['axes'],
  selection: Selection,
): Promise<MapView> {
  const samples = await readSamples(store, sweep, quantity, selection);
  const values = new Map(sweep.grid.axes.map((axis) => [axis.name, axis.values]));
  // A place that is fixed on an axis leaves one value of it.
  const valuesOf = (axis: string) => (selection.at !== undefined && axis in selection.at ? [] : (values.get(axis) ?? []));
  const maps = phaseMapsOf(samples, { ...axes, xValues: valuesOf(axes.x), yValues: valuesOf(axes.y) });
  // Boundaries run along x, whatever the axis; along words or a single value there is none.
  const places = valuesOf(axes.x);
  const along = places.length > 1 && places.every((value) => typeof value === 'number');
  const measured = along ? await readSamples(store, sweep, choice.quantity, { ...selection, refined: axes.x === REFINED_AXIS }) : [];
  return { sweep, quantity, maps, choice, axes, boundaries: measured.length === 0 ? [] : boundariesOf(measured, choice, axes.x) };
}

/** Every map as text, one below the other. */
export async function mapText(
  { sweep, quantity, maps, boundaries, choice }: MapView,
  { out, environment }: Pick<Context, 'out' | 'environment'>,
): Promise<string> {
  const range = valueRange(maps) ?? ([0, 1] as const);
  const colour = colourDepth(out.isTTY === true, environment);
  const paint: Paint = colour === 'none' ? (text) => text : await figurePainter();
  if (maps.length === 0) return 'No cells yet.';
  return maps
    .map((map) =>
      renderTerminalMap(map, {
        width: out.columns ?? WIDTH,
        colour,
        paint,
        range,
        boundaries,
        title: `${quantityTitle(quantity)} · ${panelTitle(map.question, map.at)}`,
        subtitle: `${resolutionText(map.question, map.resolution)}${boundaries.length === 0 ? '' : `; boundary: ${choice.words}`}`,
        xTitle: sweep.labels.axisTitle(map.x.axis),
        yTitle: sweep.labels.axisTitle(map.y.axis),
      }),
    )
    .join('\n\n');
}

export function mapDocument({ sweep, quantity, maps }: MapView): Json {
  return {
    sweep: sweep.grid.name,
    field: quantity.name,
    unit: quantity.unit,
    maps: maps.map((map) => ({
      question: map.questionOrdinal,
      schedule: map.question.schedule,
      budget: map.question.budget,
      efficiency: map.question.detector.efficiency,
      resolution_energy: map.resolution?.energy ?? null,
      resolution_weight: map.resolution?.weight ?? null,
      at: map.at,
      x: { axis: map.x.axis, title: sweep.labels.axisTitle(map.x.axis), values: map.x.values },
      y: { axis: map.y.axis, title: sweep.labels.axisTitle(map.y.axis), values: map.y.values },
      values: map.cells.map((row) => row.map(({ value }) => value)),
      states: map.cells.map((row) => row.map(({ state }) => state)),
    })),
  };
}

/** One row a cell. */
export function mapRows({ maps, quantity }: MapView): { columns: string[]; rows: { [column: string]: Json }[] } {
  const [first] = maps;
  const axes = first ? [...Object.keys(first.at), first.y.axis, first.x.axis] : [];
  const columns = [
    'question',
    'schedule',
    'budget',
    'efficiency',
    'resolution_energy',
    'resolution_weight',
    ...axes,
    quantity.name,
    'error',
    'count',
    'state',
  ];
  const rows = maps.flatMap((map) =>
    map.cells.flatMap((row, y) =>
      row.map((cell) => ({
        question: map.questionOrdinal,
        schedule: map.question.schedule,
        budget: map.question.budget,
        efficiency: map.question.detector.efficiency,
        resolution_energy: map.resolution?.energy ?? null,
        resolution_weight: map.resolution?.weight ?? null,
        ...map.at,
        [map.y.axis]: map.y.values[y],
        [map.x.axis]: cell.x,
        [quantity.name]: cell.value,
        error: cell.error,
        count: cell.count,
        state: cell.state,
      })),
    ),
  );
  return { columns, rows };
}

/** Writes the phase diagrams and returns their paths. @throws WindrowError `report.unwritable` */
export async function writeMapFigures(view: MapView, folder: string): Promise<string[]> {
  const { sweep, quantity, maps, boundaries, choice } = view;
  const { writeFigure } = await import('../report/render-figure.js');
  const pages = pagesOf(maps);
  const paths: string[] = [];
  for (const [index, page] of pages.entries()) {
    const spec = phaseDiagramSpec({
      maps: page,
      boundaries,
      quantity,
      labels: sweep.labels,
      boundaryText: choice.words,
      notes: sweep.notes,
    });
    const suffix = pages.length > 1 ? `-${index + 1}` : '';
    paths.push(...(await writeFigure(spec, folder, `map-${quantity.name.replaceAll('_', '-')}${suffix}`)));
  }
  return paths;
}
