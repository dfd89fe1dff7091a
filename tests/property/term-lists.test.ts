/** Term lists that hold anything: a system with a Hermitian matrix, or one refusal with a code, in bounded time. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { CATALOGUE, WindrowError } from '../../src/core/errors.js';
import type { Json } from '../../src/core/json.js';
import { validateMatrix } from '../../src/linalg/validate.js';
import { findModel } from '../../src/models/registry.js';
import { checkRequest } from '../../src/models/request.js';
import { documentFromJson } from '../../src/sweep/read.js';
import { anyTermParameters } from '../support/term-lists.js';
import { smallSweep } from '../support/small-sweep.js';

const family = findModel('terms');

function refusedOr<T>(action: () => T): T | null {
  try {
    return action();
  } catch (error) {
    expect(error).toBeInstanceOf(WindrowError);
    const { code } = error as WindrowError;
    expect(code).not.toBe('internal.invariant');
    expect(CATALOGUE[code].exit).toBe(2);
    return null;
  }
}

describe('any term list', () => {
  it('is refused with one error or built, and what is built is Hermitian', () => {
    let built = 0;
    fc.assert(
      fc.property(anyTermParameters, fc.integer({ min: 1, max: 5 }), (parameters, size) => {
        const request = refusedOr(() => checkRequest(family, { size, coupling: 0.7, parameters, prepared: 'neel' }));
        if (request === null || family.extent(request).hilbertDimension > 4096) return;
        const system = refusedOr(() => family.build(request));
        if (system === null) return;
        validateMatrix(system.matrix);
        built += 1;
      }),
      { numRuns: 1500 },
    );
    expect(built).toBeGreaterThan(100);
  });

  it('at the largest sizes is answered as well', () => {
    fc.assert(
      fc.property(anyTermParameters, fc.integer({ min: 20, max: 60 }), (parameters, size) => {
        refusedOr(() => checkRequest(family, { size, coupling: 0.7, parameters, prepared: 'neel' }));
      }),
      { numRuns: 200 },
    );
  });

  it('in a sweep file is refused with a key path', () => {
    fc.assert(
      fc.property(anyTermParameters, (parameters) => {
        try {
          documentFromJson(smallSweep({ model: 'terms', size: 3, coupling: 0.7, parameters: parameters as Json, prepare: 'neel' }));
        } catch (error) {
          expect(error).toBeInstanceOf(WindrowError);
          expect((error as WindrowError).code).not.toBe('internal.invariant');
          expect((error as WindrowError).message).toMatch(/^parameters/);
        }
      }),
      { numRuns: 300 },
    );
  });
});
