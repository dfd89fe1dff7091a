/** `windrow compare` and `windrow recheck` on an embedded store. */
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { makeWorkplace, TWO_LEVEL_SWEEP, type Workplace } from './small-store.js';

let place: Workplace;
beforeAll(async () => {
  place = makeWorkplace();
  const shorter = TWO_LEVEL_SWEEP.replace('name: two-level-line', 'name: shorter').replace('count: 15', 'count: 8');
  for (const [name, text] of [
    ['line.yaml', TWO_LEVEL_SWEEP],
    ['shorter.yaml', shorter],
  ] as const) {
    const { status, err } = await place.run('sweep', place.write(name, text));
    if (status !== 0) throw new Error(err);
  }
});
afterAll(() => place.remove());

describe('recheck', () => {
  it('computes points again and finds them the same, bit by bit', async () => {
    const { status, out } = await place.run('recheck', 'two-level-line', '--sample', '5', '--format', 'json');
    expect(status).toBe(0);
    expect(JSON.parse(out)).toMatchObject({ drawn: 5, checked: 5, cells: 10, values: { within: 0, beyond: 0, differences: [] } });
    const text = await place.run('recheck', 'two-level-line', '--sample', '2');
    expect(text.out).toContain('All values are the same, bit by bit.');
    expect(await place.run('recheck', 'two-level-line', '--sample', '0')).toMatchObject({ status: 2, out: '' });
  });
});

describe('compare', () => {
  it('counts what is common and what is in one of the two only', async () => {
    // 15 and 8 couplings from 0.1 to 1.5: every second one, 0.1, 0.3, … 1.5, as far as the doubles of both ranges are the same.
    const { status, out } = await place.run('compare', 'two-level-line', 'shorter', '--format', 'json');
    expect(status).toBe(0);
    const { common, only_a, only_b, values } = JSON.parse(out) as Record<'common' | 'only_a' | 'only_b', number> & { values: object };
    expect(common + only_a).toBe(30);
    expect(common + only_b).toBe(16);
    // The ends are the numbers of the file.
    expect(common).toBeGreaterThanOrEqual(4);
    expect(values).toMatchObject({ within: 0, beyond: 0 });
    const same = await place.run('compare', 'shorter', 'shorter');
    expect(same.out).toContain('All values are the same, bit by bit.');
    expect(await place.run('compare', 'shorter', 'nobody')).toMatchObject({ status: 2, out: '' });
  });
});
