/**
 * A process with an embedded store, driven by messages: [method, ...arguments] is answered with { value } or { error }. Runs the
 * compiled program, whose folder is the first argument.
 */
const [dist] = process.argv.slice(2);
const { openEmbeddedStore } = await import(`${dist}/src/store/embedded/embedded-store.js`);

let store = null;
const methods = {
  async open(options) {
    const notices = [];
    store = await openEmbeddedStore({ ...options, onNotice: (message) => notices.push(message) });
    return notices;
  },
  sweeps: async () => (await store.listSweeps()).map(({ name }) => name),
  register: async (sweep) => (await store.registerSweep(sweep)).name,
  close: async () => store.close(),
};

process.on('message', async ([method, ...args]) => {
  let answer;
  try {
    answer = { value: (await methods[method](...args)) ?? null };
  } catch ({ code, message, details }) {
    answer = { error: { code, message, where: details?.where, found: details?.found } };
  }
  process.send(answer, () => {
    if (method === 'close') process.disconnect();
  });
});
