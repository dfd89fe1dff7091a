/**
 * What an answer costs, for estimates before anything is computed. Upper bounds in the number of levels n: runs that are detected
 * early stop early, and weak levels are left out.
 */
import { buildSchedule } from '../schedules/registry.js';
import type { Question } from './types.js';

export interface AnswerCost {
  readonly flops: number;
  readonly bytes: number;
}

/** @param levels number of bright levels (an upper bound will do) */
export function answerCost(levels: number, question: Question): AnswerCost {
  const n = levels;
  const pairs = (n * (n - 1)) / 2;
  const { budget, sampling } = question;
  const random = buildSchedule(question.schedule).random;
  const { intervals } = question.schedule;
  const characteristic = 80 + (typeof intervals === 'object' ? 40 * intervals.length : 0);
  // Averaged step 18, transition step 6 operations a pair; a vector step 22 a level. χ is evaluated a few times for every pair.
  const steps = random ? budget * 24 * pairs : budget * 22 * n;
  const moments = ((random ? 2 : 4) * characteristic + 100) * pairs + (random ? n ** 3 / 3 : 0);
  const curve = 4 * budget * Math.log2(4 * budget + 1) * 10;
  const draws = sampling === null ? 0 : sampling.draws * (budget * 60 * n + curve);
  const planes = random ? 6 * pairs + 2 * n * n : 0;
  return { flops: steps + moments + draws, bytes: 8 * (planes + 20 * n + (sampling === null ? 0 : 16 * budget)) };
}
