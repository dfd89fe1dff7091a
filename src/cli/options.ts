/** Options that several commands share, and the small languages of their values. */
import type { Command } from 'commander';
import { Option } from 'commander';
import { parse as parseYaml } from 'yaml';
import { type Average, AVERAGES } from '../analysis/samples.js';
import { WindrowError } from '../core/errors.js';
import { FORMATS } from './context.js';

function usage(option: string, found: string, allowed: string): WindrowError {
  return new WindrowError('cli.usage', 'an option that cannot be understood', { where: option, found, allowed });
}

/** A command with the options that every verb has. */
export function verb(program: Command, name: string, description: string): Command {
  return program
    .command(name)
    .description(description)
    .addOption(new Option('--format <format>', 'how to print data').choices([...FORMATS]));
}

export function storeOption(command: Command): Command {
  return command.option('--store <folder>', 'folder of the embedded store; DATABASE_URL goes before it');
}

export function computeOptions(command: Command): Command {
  return command
    .option('--threads <count>', 'compute threads')
    .option('--memory <size>', 'memory one evaluation may use, such as 512M or 2G');
}

export interface AverageOption {
  readonly average?: Average;
}

export function averageOption(command: Command): Command {
  return command.addOption(
    new Option('--average <kind>', 'disorder realisations: their mean (standard), or the typical value exp<ln x>').choices([...AVERAGES]),
  );
}

export const collect = (value: string, all: string[] | undefined): string[] => [...(all ?? []), value];

/** `key=value` pairs; values are read as YAML, so numbers are numbers and `{ site: 2 }` is a state. */
export function parsePairs(option: string, pairs: readonly string[]): [string, unknown][] {
  return pairs.map((pair) => {
    const at = pair.indexOf('=');
    if (at < 1) throw usage(option, pair, 'key=value');
    try {
      return [pair.slice(0, at).trim(), parseYaml(pair.slice(at + 1)) as unknown];
    } catch {
      throw usage(option, pair, 'key=value with a value in YAML');
    }
  });
}

/** `axis=value` pairs that fix a place on some axes. */
export function parsePlace(option: string, pairs: readonly string[] | undefined): { [axis: string]: number | string } {
  return Object.fromEntries(
    parsePairs(option, pairs ?? []).map(([axis, value]) => {
      if (typeof value === 'number' || typeof value === 'string') return [axis, value];
      throw usage(option, JSON.stringify(value), 'axis=value with a number or a word');
    }),
  );
}

/** '0,2' or '0-2' → question numbers; undefined stays undefined (all). */
export function parseQuestions(text: string | undefined): number[] | undefined {
  if (text === undefined) return undefined;
  return text.split(',').flatMap((part) => {
    const match = /^\s*(\d{1,6})(?:\s*-\s*(\d{1,6}))?\s*$/.exec(part);
    const from = Number(match?.[1]);
    const to = Number(match?.[2] ?? match?.[1]);
    if (!match || to < from) throw usage('--question', text, 'numbers of questions as `status NAME` lists them, such as 0,2 or 0-2');
    return Array.from({ length: to - from + 1 }, (_, index) => from + index);
  });
}

/** @param allowed what the number must be, in words */
export function parseNumber(
  option: string,
  text: string,
  allowed = 'a number',
  accepts: (value: number) => boolean = Number.isFinite,
): number {
  const value = text.trim() === '' ? NaN : Number(text);
  if (!accepts(value)) throw usage(option, text, allowed);
  return value;
}
