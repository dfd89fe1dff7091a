/** Requests for models in tests: defaults filled in, untyped input allowed. */
import { findModel } from '../../src/models/registry.js';
import { checkRequest } from '../../src/models/request.js';
import type { RawRequest } from '../../src/models/request.js';
import type { System, SystemRequest } from '../../src/models/types.js';

export type Asked = Partial<RawRequest> & { readonly size: unknown };

/** A checked request of a family; coupling 1 unless given. */
export const requestOf = (model: string, asked: Asked): SystemRequest =>
  checkRequest(findModel(model), { coupling: 1, prepared: { site: 1 }, ...asked });

export const systemOf = (model: string, asked: Asked): System => findModel(model).build(requestOf(model, asked));
