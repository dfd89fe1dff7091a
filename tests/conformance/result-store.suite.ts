/** What every result store guarantees; each adapter's test file calls it. */
import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { SpectralMeasure } from '../../src/spectral/types.js';
import type { CellRow, ResultStore } from '../../src/store/types.js';
import {
  cellFields,
  cellResult,
  failureOf,
  gridPoint,
  idOf,
  measured,
  pointFields,
  pointResult,
  questionRecord,
  returnMeasure,
  specOf,
  sweepOf,
} from '../support/results.js';

export interface StoreUnderTest {
  /** a store on the same rows, as another process would open it */
  open(): Promise<ResultStore>;
  end(): Promise<void>;
}

export function resultStoreSuite(name: string, prepare: () => Promise<StoreUnderTest>): void {
  describe(`result store: ${name}`, () => {
    let subject: StoreUnderTest;
    let store: ResultStore;
    let other: ResultStore;

    beforeAll(async () => {
      subject = await prepare();
      store = await subject.open();
      other = await subject.open();
      await store.migrate();
    });
    afterAll(async () => {
      await store?.close();
      await other?.close();
      await subject?.end();
    });

    const rowsOf = async (sweep: string, questions?: readonly number[], from = store): Promise<CellRow[]> => {
      const rows: CellRow[] = [];
      for await (const row of from.cells(questions === undefined ? { sweep } : { sweep, questions })) rows.push(row);
      return rows;
    };

    /** A registered sweep with enrolled points whose ids no other test uses. */
    const sweepWith = async (name: string, points: number, questions: number) => {
      const grid = Array.from({ length: points }, (_, ordinal) => gridPoint(ordinal, `${name} ${ordinal}`));
      const asked = Array.from({ length: questions }, (_, ordinal) => questionRecord(ordinal, `${name} ${ordinal}`));
      await store.registerSweep(sweepOf(name, points, asked));
      const missing = await store.enrol(name, grid);
      return { grid, asked, missing };
    };

    describe('sweeps', () => {
      it('keeps what is registered and returns it from another process', async () => {
        const sweep = sweepOf('kept', 3, [questionRecord(0, 'kept'), questionRecord(1, 'kept too')]);
        const record = await store.registerSweep(sweep);
        expect(record).toMatchObject({ ...sweep, state: 'open' });
        expect(new Date(record.created).toISOString()).toBe(record.created);
        expect(await other.findSweep('kept')).toEqual(record);
        expect(await other.listSweeps()).toContainEqual(record);
      });

      it('takes the same sweep again, also from many processes at once', async () => {
        const sweep = sweepOf('again', 3, [questionRecord(0, 'again')]);
        const records = await Promise.all(Array.from({ length: 12 }, (_, i) => (i % 2 ? store : other).registerSweep(sweep)));
        expect(new Set(records.map((record) => JSON.stringify(record))).size).toBe(1);
      });

      it('refuses another document, and another method version, under a taken name', async () => {
        const sweep = sweepOf('taken', 3, []);
        await store.registerSweep(sweep);
        await expect(other.registerSweep({ ...sweep, digest: idOf('another') })).rejects.toMatchObject({ code: 'sweep.differs' });
        await expect(other.registerSweep({ ...sweep, methodVersion: 'another' })).rejects.toMatchObject({ code: 'sweep.differs' });
        expect(await store.findSweep('taken')).toMatchObject(sweep);
      });

      it('changes a state that every process sees', async () => {
        await store.registerSweep(sweepOf('state', 1, []));
        await store.setSweepState('state', 'stopping');
        expect((await other.findSweep('state'))?.state).toBe('stopping');
      });

      it('knows what it does not hold', async () => {
        expect(await store.findSweep('nobody')).toBeNull();
        const unknown = { code: 'sweep.unknown' };
        await expect(store.setSweepState('nobody', 'done')).rejects.toMatchObject(unknown);
        await expect(store.enrol('nobody', [gridPoint(0)])).rejects.toMatchObject(unknown);
        await expect(store.progress('nobody')).rejects.toMatchObject(unknown);
        await expect(store.clearFailures('nobody')).rejects.toMatchObject(unknown);
        await expect(rowsOf('nobody')).rejects.toMatchObject(unknown);
      });
    });

    describe('follow-ups', () => {
      const asked = (record: { id: string; question: unknown }) =>
        ({ id: record.id, question: record.question }) as ReturnType<typeof questionRecord>;

      it('number on where the questions of the sweep end, once each, and keep the numbers of what was swept', async () => {
        const { asked: swept } = await sweepWith('followed', 1, 2);
        const later = [questionRecord(7, 'followed later'), questionRecord(8, 'followed too')];
        const records = await store.followUp('followed', [asked(later[0]), asked(swept[1]), asked(later[1]), asked(later[0])]);
        expect(records.map(({ ordinal }) => ordinal)).toEqual([2, 1, 3, 2]);
        expect(records.map(({ id }) => id)).toEqual([later[0].id, swept[1].id, later[1].id, later[0].id]);
        expect((await other.followUp('followed', [asked(later[1])]))[0].ordinal).toBe(3);
        const record = await other.findSweep('followed');
        expect(record?.questions).toEqual(swept);
        expect(record?.followUps).toEqual([
          { ...later[0], ordinal: 2 },
          { ...later[1], ordinal: 3 },
        ]);
      });

      it('give one number to a question that many processes ask at once', async () => {
        await sweepWith('asked at once', 1, 1);
        const ask = (i: number) => (i % 2 ? store : other).followUp('asked at once', [asked(questionRecord(0, `at once ${i % 3}`))]);
        const records = (await Promise.all(Array.from({ length: 12 }, (_, i) => ask(i)))).flat();
        expect(new Map(records.map(({ id, ordinal }) => [ordinal, id])).size).toBe(3);
        expect(new Set(records.map(({ id, ordinal }) => `${id} ${ordinal}`)).size).toBe(3);
        expect([...new Set(records.map(({ ordinal }) => ordinal))].sort()).toEqual([1, 2, 3]);
      });

      it('are shown among the cells, and leave enrolment and progress as they were', async () => {
        const { grid, asked: swept } = await sweepWith('beside', 2, 1);
        const [later] = await store.followUp('beside', [asked(questionRecord(0, 'beside later'))]);
        await store.save({
          points: grid.map((point) => pointResult(point)),
          cells: grid.map((point) => cellResult(point, swept[0])),
          failures: [],
        });
        await store.save({ points: [], cells: [cellResult(grid[1], later)], failures: [] });
        expect(await store.enrol('beside', grid)).toEqual([]);
        expect(await store.progress('beside')).toMatchObject({ cells: 2, storedCells: 2, storedPoints: 2, failedPoints: 0 });
        const rows = await rowsOf('beside');
        expect(rows.map(({ ordinal, questionOrdinal, fields }) => [ordinal, questionOrdinal, fields !== null])).toEqual([
          [0, 0, true],
          [0, 1, false],
          [1, 0, true],
          [1, 1, true],
        ]);
        expect((await rowsOf('beside', [1])).map(({ question }) => question)).toEqual([later.question, later.question]);
      });

      it('are refused for a sweep that does not exist', async () => {
        await expect(store.followUp('nobody', [])).rejects.toMatchObject({ code: 'sweep.unknown' });
      });
    });

    describe('enrolment', () => {
      it('tells what is missing, in the order given, and again when asked again', async () => {
        const { grid, asked, missing } = await sweepWith('missing', 3, 2);
        const questionIds = asked.map(({ id }) => id);
        const all = grid.map(({ id }) => ({ id, measured: false, questionIds, failure: null }));
        expect(missing).toEqual(all);
        expect(await other.enrol('missing', [...grid].reverse())).toEqual([...all].reverse());
      });

      it('leaves out complete points and lists open questions of measured ones and reasons of failed ones', async () => {
        const { grid, asked } = await sweepWith('partly', 4, 2);
        await store.save({
          points: [pointResult(grid[0]), pointResult(grid[1])],
          cells: [cellResult(grid[0], asked[0]), cellResult(grid[0], asked[1]), cellResult(grid[1], asked[0])],
          failures: [failureOf(grid[2])],
        });
        expect(await other.enrol('partly', grid)).toEqual([
          { id: grid[1].id, measured: true, questionIds: [asked[1].id], failure: null },
          {
            id: grid[2].id,
            measured: false,
            questionIds: asked.map(({ id }) => id),
            failure: { code: 'point.too-large', message: 'needs 12 GB' },
          },
          { id: grid[3].id, measured: false, questionIds: asked.map(({ id }) => id), failure: null },
        ]);
      });

      it('lists a point that lies on two grid places once, and counts it twice', async () => {
        const asked = [questionRecord(0, 'twice')];
        await store.registerSweep(sweepOf('twice', 2, asked));
        const places = [gridPoint(0, 'twice'), { ...gridPoint(1, 'twice'), coordinates: { coupling: -1 } }];
        expect(await store.enrol('twice', places)).toHaveLength(1);
        await store.save({ points: [pointResult(places[0])], cells: [cellResult(places[0], asked[0])], failures: [] });
        expect(await store.progress('twice')).toMatchObject({ points: 2, cells: 2, storedPoints: 2, storedCells: 2 });
        expect((await rowsOf('twice')).map((row) => row.coordinates)).toEqual(places.map(({ coordinates }) => coordinates));
      });

      it('shares points between sweeps: what one has computed the other need not', async () => {
        const { grid } = await sweepWith('first', 2, 1);
        await store.save({ points: [pointResult(grid[0])], cells: [], failures: [] });
        await store.registerSweep(sweepOf('second', 2, [questionRecord(0, 'of the second')]));
        expect((await other.enrol('second', grid)).map((point) => point.measured)).toEqual([true, false]);
      });

      it('enrols the same points from many processes at once', async () => {
        const { grid } = await sweepWith('crowd', 200, 1);
        const answers = await Promise.all(Array.from({ length: 8 }, (_, i) => (i % 2 ? store : other).enrol('crowd', grid)));
        for (const answer of answers) expect(answer.map(({ id }) => id)).toEqual(grid.map(({ id }) => id));
      });
    });

    describe('saving', () => {
      it('is idempotent: a stored row is left as it is', async () => {
        const { grid, asked } = await sweepWith('same', 1, 1);
        const first = pointResult(grid[0], measured(returnMeasure([1], [1]), { method: 'lanczos-ql' }));
        await store.save({ points: [first], cells: [cellResult(grid[0], asked[0], { winding_number: 5 })], failures: [] });
        const second = pointResult(grid[0], measured(returnMeasure([2], [1]), { method: 'householder-ql' }));
        await other.save({ points: [second], cells: [cellResult(grid[0], asked[0], { winding_number: 6 })], failures: [] });
        const [row] = await rowsOf('same');
        expect(row?.point?.method).toBe('lanczos-ql');
        expect(row?.fields?.winding_number).toBe(5);
        expect((await store.measures([grid[0].id])).get(grid[0].id)).toEqual(first.measured);
      });

      it('is one transaction: nothing of a batch that is refused is kept', async () => {
        const { grid, asked } = await sweepWith('whole', 2, 1);
        const batch = {
          points: [pointResult(grid[0])],
          cells: [cellResult(grid[0], asked[0]), cellResult(grid[1], { id: idOf('no such question') })],
          failures: [],
        };
        await expect(store.save(batch)).rejects.toMatchObject({ code: 'internal.invariant' });
        expect(await store.progress('whole')).toMatchObject({ storedPoints: 0, storedCells: 0 });
      });

      it('saves the same rows from many processes at once, whatever their order', async () => {
        const { grid, asked } = await sweepWith('race', 60, 2);
        const points = grid.map((point) => pointResult(point));
        const cells = grid.flatMap((point) => asked.map((question) => cellResult(point, question)));
        await Promise.all(
          Array.from({ length: 8 }, (_, i) =>
            (i % 2 ? store : other).save({
              points: i % 3 ? points : [...points].reverse(),
              cells: i % 3 ? [...cells].reverse() : cells,
              failures: [],
            }),
          ),
        );
        expect(await store.progress('race')).toEqual({
          points: 60,
          cells: 120,
          storedPoints: 60,
          storedCells: 120,
          failedPoints: 0,
          failures: [],
        });
      });

      it('keeps failures with their reasons until the point is saved or they are cleared', async () => {
        const { grid } = await sweepWith('failing', 4, 1);
        await store.save({
          points: [],
          cells: [],
          failures: [failureOf(grid[0]), failureOf(grid[1]), failureOf(grid[2], 'another "reason"')],
        });
        expect((await other.progress('failing')).failures).toEqual([
          { code: 'point.too-large', message: 'needs 12 GB', count: 2 },
          { code: 'point.too-large', message: 'another "reason"', count: 1 },
        ]);
        await store.save({ points: [pointResult(grid[0])], cells: [], failures: [] });
        expect((await other.progress('failing')).failedPoints).toBe(2);
        expect(await other.clearFailures('failing')).toBe(2);
        expect(await store.clearFailures('failing')).toBe(0);
        expect((await store.progress('failing')).failedPoints).toBe(0);
      });

      it('clears only the failures of its sweep', async () => {
        const one = await sweepWith('one', 1, 1);
        const two = await sweepWith('two', 1, 1);
        await store.save({ points: [], cells: [], failures: [failureOf(one.grid[0]), failureOf(two.grid[0])] });
        expect(await store.clearFailures('one')).toBe(1);
        expect((await store.progress('two')).failedPoints).toBe(1);
      });

      it('takes an empty batch', async () => {
        await store.save({ points: [], cells: [], failures: [] });
      });
    });

    describe('numbers', () => {
      const roundTrip = async (label: string, measure: SpectralMeasure, overlap: readonly [number, number] = [1, 0]) => {
        const id = idOf('numbers', label);
        await store.save({ points: [{ id, spec: specOf(label), measured: { ...measured(measure), overlap } }], cells: [], failures: [] });
        return (await other.measures([id])).get(id)!;
      };
      const bits = (array: Float64Array | null): string[] | null =>
        array && Array.from(new BigUint64Array(array.slice().buffer), (word) => word.toString(16));

      it('come back bit for bit: denormals, signed zeros, the ends of the range', async () => {
        const hard = [5e-324, -5e-324, 2.2250738585072014e-308, 1e-300, -0, 0, Number.MAX_VALUE, 0.1, 1 / 3, -Math.PI, 2 ** 53 + 2];
        const back = await roundTrip('hard', { ...returnMeasure(hard, hard), overlapIm: Float64Array.from(hard) });
        for (const array of [back.measure.energies, back.measure.weights, back.measure.overlapRe, back.measure.overlapIm])
          expect(bits(array)).toEqual(bits(Float64Array.from(hard)));
      });

      it('come back bit for bit, any of them', async () => {
        const numbers = fc.array(fc.double({ noNaN: false }), { maxLength: 40 });
        await fc.assert(
          fc.asyncProperty(numbers, fc.double(), fc.double(), async (values, re, im) => {
            const label = JSON.stringify([values.map(String), String(re), String(im)]);
            const back = await roundTrip(label, { ...returnMeasure(values, values), overlapRe: Float64Array.from(values, (x) => -x) }, [
              re,
              im,
            ]);
            expect(bits(back.measure.energies)).toEqual(bits(Float64Array.from(values)));
            expect(Array.from(back.measure.overlapRe, (x) => -x)).toEqual(values);
            expect(back.overlap).toEqual([re, im]);
          }),
          { numRuns: 60 },
        );
      });

      it('of the return problem are one array under two names again', async () => {
        const { measure } = await roundTrip('return', returnMeasure([-1, 1], [0.25, 0.75]));
        expect(measure.overlapRe).toBe(measure.weights);
        const equal = await roundTrip('equal', { ...returnMeasure([-1, 1], [0.5, 0.5]), overlapRe: Float64Array.of(0.5, 0.5) });
        expect(equal.measure.overlapRe).toBe(equal.measure.weights);
        const transition = await roundTrip('transition', { ...returnMeasure([-1, 1], [0.5, 0.5]), overlapRe: Float64Array.of(0.5, -0.5) });
        expect([...transition.measure.overlapRe]).toEqual([0.5, -0.5]);
      });

      it('in fields come back as they were: null, infinity, NaN, signed zero, large counts, flags with any text', async () => {
        const { grid, asked } = await sweepWith('fields', 1, 1);
        const point = pointFields({
          hilbert_dimension: 1e60,
          mean_energy: -0,
          energy_variance: NaN,
          smallest_gap: null,
          gap_ratio: 5e-324,
          flags: ['doubtful', 'underresolved'],
          flag_reasons: ['comma, "quote", \\backslash, {brace}', "NULL and 'apostrophe' äöü 量子"],
        });
        const cell = {
          decay_rate: Infinity,
          settling_measurements: 1e19,
          mean_measurements: null,
          variance_measurements: -Infinity,
          sampled_seed: Number.MAX_SAFE_INTEGER,
          flags: ['resolution-sensitive'] as const,
          flag_reasons: [''],
        };
        await store.save({
          points: [pointResult(grid[0], { ...measured(), fields: point })],
          cells: [cellResult(grid[0], asked[0], cell)],
          failures: [],
        });
        const [row] = await rowsOf('fields', undefined, other);
        expect(row?.point).toEqual(point);
        expect(row?.fields).toEqual(cellFields(cell));
      });
    });

    describe('measures', () => {
      it('answers for stored ids only', async () => {
        const { grid } = await sweepWith('measures', 3, 1);
        await store.save({ points: [pointResult(grid[0]), pointResult(grid[2])], cells: [], failures: [] });
        const found = await other.measures(grid.map(({ id }) => id));
        expect(new Set(found.keys())).toEqual(new Set([grid[0].id, grid[2].id]));
        expect(found.get(grid[0].id)).toEqual(measured());
        expect((await store.measures([])).size).toBe(0);
      });

      it('holds thousands of levels', async () => {
        const levels = Array.from({ length: 5000 }, (_, j) => Math.sqrt(j + 0.5));
        const id = idOf('large');
        await store.save({
          points: [{ id, spec: specOf('large'), measured: measured(returnMeasure(levels, levels)) }],
          cells: [],
          failures: [],
        });
        expect([...(await store.measures([id])).get(id)!.measure.energies]).toEqual(levels);
      });
    });

    describe('result rows', () => {
      it('come in the grid order, one for every enrolled point and question', async () => {
        const { grid, asked } = await sweepWith('rows', 3, 2);
        await store.save({
          points: [pointResult(grid[1])],
          cells: [cellResult(grid[1], asked[1], { winding_number: 7 })],
          failures: [failureOf(grid[2])],
        });
        const rows = await rowsOf('rows', undefined, other);
        expect(rows.map((row) => [row.ordinal, row.questionOrdinal])).toEqual([
          [0, 0],
          [0, 1],
          [1, 0],
          [1, 1],
          [2, 0],
          [2, 1],
        ]);
        const common = (ordinal: number, question: number) => ({
          ordinal,
          coordinates: grid[ordinal].coordinates,
          pointId: grid[ordinal].id,
          spec: grid[ordinal].spec,
          question: asked[question].question,
          questionOrdinal: question,
        });
        const empty = { cellId: null, fields: null, failure: null };
        const failure = { code: 'point.too-large', message: 'needs 12 GB' };
        expect(rows[0]).toEqual({ ...common(0, 0), ...empty, point: null });
        expect(rows[2]).toEqual({ ...common(1, 0), ...empty, point: pointFields() });
        expect(rows[3]).toEqual({
          ...common(1, 1),
          cellId: cellResult(grid[1], asked[1]).id,
          point: pointFields(),
          fields: cellFields({ winding_number: 7 }),
          failure: null,
        });
        expect(rows[5]).toEqual({ ...common(2, 1), ...empty, point: null, failure });
        expect((await rowsOf('rows', [1])).map((row) => row.questionOrdinal)).toEqual([1, 1, 1]);
        expect(await rowsOf('rows', [])).toEqual([]);
      });

      it('stream past the size of one fetch, from one snapshot, and may be left early', async () => {
        const { grid, asked } = await sweepWith('long', 1300, 2);
        const seen: number[] = [];
        for await (const row of store.cells({ sweep: 'long' })) {
          // Saved while the rows are read: a reader of one snapshot does not see it.
          if (row.ordinal === 0 && row.questionOrdinal === 0)
            await other.save({ points: [pointResult(grid[1299])], cells: [cellResult(grid[1299], asked[0])], failures: [] });
          expect(row.fields).toBeNull();
          seen.push(row.ordinal * 2 + row.questionOrdinal);
        }
        expect(seen).toEqual(Array.from({ length: 2600 }, (_, i) => i));
        // More often than there are connections.
        for (let i = 0; i < 25; i++)
          for await (const row of store.cells({ sweep: 'long' })) {
            expect(row.ordinal).toBe(0);
            break;
          }
        expect((await rowsOf('long')).at(-2)?.fields).toEqual(cellFields());
      });
    });

    describe('locks', () => {
      it('lets one in at a time, by name, and frees the lock however the work ends', async () => {
        const outcome = await store.withLock('a lock', async () => {
          expect(await other.withLock('a lock', () => Promise.resolve('in'))).toBeNull();
          expect(await store.withLock('a lock', () => Promise.resolve('in'))).toBeNull();
          expect(await other.withLock('another lock', () => Promise.resolve('in'))).toBe('in');
          return 'done';
        });
        expect(outcome).toBe('done');
        const mine = new RangeError('mine');
        await expect(other.withLock('a lock', () => Promise.reject(mine))).rejects.toBe(mine);
        expect(await store.withLock('a lock', () => Promise.resolve('in'))).toBe('in');
      });
    });

    it('migrates from many processes at once and again', async () => {
      await Promise.all(Array.from({ length: 10 }, (_, i) => (i % 2 ? store : other).migrate()));
    });

    it('closes twice, and then refuses work', async () => {
      const third = await subject.open();
      await third.close();
      await third.close();
      await expect(third.listSweeps()).rejects.toMatchObject({ code: 'internal.invariant' });
    });
  });
}
