/**
 * One seed for all property tests, so that a run can be repeated and a check of the project finds today what it found yesterday.
 * PROPERTY_SEED=n explores others: a failure names the seed and the path that lead back to it.
 */
import fc from 'fast-check';

fc.configureGlobal({ ...fc.readConfigureGlobal(), seed: Number(process.env['PROPERTY_SEED'] ?? 20_301) });
