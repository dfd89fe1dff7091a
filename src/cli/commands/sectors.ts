/** `windrow sectors FILE`: Krylov sectors of the product basis, by size, and whether they fragment the space. */
import { type Command, Option } from 'commander';
import type { Json } from '../../core/json.js';
import { findModel } from '../../models/registry.js';
import { coordinatesText, formatCount, formatNumber } from '../../report/format.js';
import { writeFigure } from '../../report/render-figure.js';
import { sectorsFigureSpec } from '../../report/sectors-figure.js';
import { renderTable } from '../../report/table.js';
import type { SweepDocument } from '../../sweep/document.js';
import { readSweepFile } from '../../sweep/read-file.js';
import { memoryLimit } from '../compose.js';
import { EXIT, type Io, say } from '../context.js';
import { verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';
import { type Scope, type SectorSeries, sectorSeries, type SizedCensus } from '../sector-series.js';

interface Options {
  readonly scope: Scope;
  readonly figures?: string;
}

const SCOPE_WORDS: Readonly<Record<Scope, string>> = {
  conserved: 'configurations with the conserved numbers of the detected state',
  whole: 'all configurations of the model',
};

/** Sizes of sectors that a table lists, largest first. */
const LISTED = 10;

function seriesText({ at, rows, verdict }: SectorSeries): string {
  const head = coordinatesText(at);
  const table = renderTable(rows, [
    { title: 'size', value: ({ size }) => String(size), align: 'right' },
    { title: 'dimension', value: ({ census }) => formatCount(census.dimension), align: 'right' },
    { title: 'sectors', value: ({ census }) => formatCount(census.sector_count), align: 'right' },
    { title: 'largest', value: ({ census }) => formatCount(census.largest_sector), align: 'right' },
    { title: 'share', value: ({ census }) => formatNumber(census.largest_sector_fraction, 4), align: 'right' },
    { title: 'frozen', value: ({ census }) => formatCount(census.frozen_states), align: 'right' },
    { title: 'of the state', value: ({ sector_dimension }) => formatCount(sector_dimension), align: 'right' },
  ]);
  const last = rows.at(-1) as SizedCensus;
  const listed = last.census.sizes.slice(0, LISTED).map(({ size, sectors }) => `${formatCount(sectors)} of ${formatCount(size)}`);
  const rest = last.census.sizes.length - listed.length;
  const more = rest > 0 ? `, and ${rest} smaller sizes` : '';
  return [
    ...(head === '' ? [] : [head]),
    table,
    `Fragmentation: ${verdict.fragmentation} – ${verdict.reason}.`,
    `Sectors at size ${last.size}: ${listed.join(', ')}${more}.`,
  ].join('\n');
}

function sectorsText(document: SweepDocument, scope: Scope, all: readonly SectorSeries[]): string {
  return [`${document.name}: sectors of ${document.model}; ${SCOPE_WORDS[scope]}`, ...all.map(seriesText)].join('\n\n');
}

function sectorsDocument(document: SweepDocument, scope: Scope, all: readonly SectorSeries[]): Json {
  return {
    sweep: document.name,
    model: document.model,
    scope,
    series: all.map(({ at, rows, verdict }) => ({
      at,
      fragmentation: verdict.fragmentation,
      reason: verdict.reason,
      fit: verdict.fit as unknown as Json,
      sizes: rows.map(({ size, census, sector_dimension }) => {
        const { sizes, ...counts } = census;
        return { size, ...counts, sector_dimension, distribution: sizes as unknown as Json };
      }),
    })),
  };
}

const COUNTS = ['dimension', 'sector_count', 'largest_sector', 'largest_sector_fraction', 'frozen_states'] as const;

/** One row a size. */
function sectorsRows(all: readonly SectorSeries[]): { columns: string[]; rows: { [column: string]: Json }[] } {
  const axes = Object.keys(all[0]?.at ?? {});
  const rows = all.flatMap(({ at, rows: sized, verdict }) =>
    sized.map(({ size, census, sector_dimension }) => ({
      ...at,
      size,
      ...Object.fromEntries(COUNTS.map((name) => [name, census[name]])),
      sector_dimension,
      fragmentation: verdict.fragmentation,
      exponent: verdict.fit?.exponent ?? null,
      exponent_error: verdict.fit?.exponent_error ?? null,
    })),
  );
  return { columns: [...axes, 'size', ...COUNTS, 'sector_dimension', 'fragmentation', 'exponent', 'exponent_error'], rows };
}

export function sectorsCommand(program: Command, io: Io): void {
  verb(program, 'sectors', 'count the Krylov sectors of the systems in a sweep file, without building a matrix')
    .argument('<file>', 'sweep file, YAML or JSON')
    .addOption(
      new Option('--scope <scope>', 'the space whose sectors are counted: what the conserved numbers of the state leave, or all')
        .choices(['conserved', 'whole'])
        .default('conserved'),
    )
    .option('--figures <folder>', 'also write the figure there, as SVG and PNG')
    .option('--memory <size>', 'memory the numbering may use, 4 bytes a configuration, such as 512M or 2G')
    .action(
      runVerb<[string], Options>(io, {}, async (context, options, file) => {
        const document = readSweepFile(file, { allowLarge: true });
        const all = sectorSeries(document, options.scope, memoryLimit(context.settings));
        await print(context, {
          table: () => sectorsText(document, options.scope, all),
          json: () => sectorsDocument(document, options.scope, all),
          csv: () => sectorsRows(all),
        });
        if (options.figures !== undefined) {
          const { size } = findModel(document.model);
          const spec = sectorsFigureSpec({
            series: all.map(({ at, rows, verdict }) => ({ label: coordinatesText(at), rows, fit: verdict.fit })),
            sizeTitle: `size ${size.symbol}: ${size.meaning}`,
            caption: `${document.name}: sectors of ${document.model}; ${SCOPE_WORDS[options.scope]}. ${all.map(({ at, verdict }) => `${[coordinatesText(at), verdict.fragmentation].filter((part) => part !== '').join(': ')} – ${verdict.reason}.`).join(' ')}`,
          });
          for (const path of await writeFigure(spec, options.figures, `sectors-${document.name}`)) say(context, `wrote ${path}`);
        }
        return EXIT.done;
      }),
    );
}
