/**
 * Layers: a room imports from rooms below it only, type imports included, and nothing imports in a circle. DEVELOPERS.md draws the map.
 * Rooms named together share a rank and do not know each other.
 */
const LAYERS = [
  ['core'],
  ['linalg'],
  ['models', 'spectral', 'schedules'],
  ['statistics'],
  ['sweep'],
  ['store', 'queue'],
  ['coordinator', 'analysis'],
  ['report'],
  ['cli', 'web'],
];

/** The three rooms under statistics hand each other records; those contracts, and only those, are shared across the rank. */
const CONTRACT = '^src/(models|spectral|schedules)/types\\.ts$';
const room = (names) => `^src/(${names.join('|')})/`;

const upward = LAYERS.slice(0, -1).map((rooms, rank) => ({
  name: `${rooms.join('-')}-imports-upward`,
  severity: 'error',
  comment: `${rooms.join(', ')} may import only what lies below`,
  from: { path: room(rooms) },
  to: { path: `${room(LAYERS.slice(rank + 1).flat())}|^workers/` },
}));

const sideways = LAYERS.filter((rooms) => rooms.length > 1).flatMap((rooms) =>
  rooms.map((name) => ({
    name: `${name}-imports-its-neighbour`,
    severity: 'error',
    comment: `${rooms.join(', ')} do not know each other`,
    from: { path: room([name]) },
    to: { path: room(rooms.filter((other) => other !== name)), pathNot: CONTRACT },
  })),
);

/** Rooms of pure functions: no file, no socket, no clock; they run in a browser as they are. */
const pure = {
  name: 'pure-rooms-import-node',
  severity: 'error',
  from: {
    path: room(['linalg', 'models', 'spectral', 'schedules', 'statistics', 'sweep', 'analysis']),
    pathNot: '^src/sweep/read-file\\.ts$',
  },
  to: { dependencyTypes: ['core'] },
};

module.exports = {
  forbidden: [
    ...upward,
    ...sideways,
    pure,
    { name: 'no-cycles', severity: 'error', from: {}, to: { circular: true } },
    { name: 'every-room-has-its-rank', severity: 'error', from: {}, to: { path: '^src/', pathNot: room(LAYERS.flat()) } },
    { name: 'resolvable', severity: 'error', from: {}, to: { couldNotResolve: true } },
    { name: 'declared', severity: 'error', from: {}, to: { dependencyTypes: ['npm-no-pkg', 'npm-unknown'] } },
    {
      name: 'shipped',
      severity: 'error',
      comment: 'the program runs without development packages',
      from: {},
      to: { dependencyTypes: ['npm-dev'], dependencyTypesNot: ['type-only'] },
    },
    { name: 'source-imports-tests', severity: 'error', from: {}, to: { path: '^tests/' } },
  ],
  options: {
    doNotFollow: { path: 'node_modules' },
    // Another language in the same file ending; compiled by itself.
    exclude: { path: '/assembly/' },
    tsPreCompilationDeps: true,
    tsConfig: { fileName: 'tsconfig.json' },
    enhancedResolveOptions: { exportsFields: ['exports'], conditionNames: ['import', 'node', 'default', 'types'] },
  },
};
