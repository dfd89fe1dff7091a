/** The key under a figure: what its marks mean. Pure; runs in a browser as well. */
import type { Mark } from 'vega';
import { EMPTY_FILL, FONT, INK, textWidth } from './figure-parts.js';

export interface KeyEntry {
  readonly kind: 'boundary' | 'doubtful' | 'missing' | 'failed' | 'undefined' | 'hollow';
  readonly text: string;
}

const SIZE = 11;
const BOX = { width: 22, height: 12 } as const;

const value = <T>(content: T) => ({ value: content });

function stroke(x: number, y: number, x2: number, y2: number, colour: string, width: number): Mark {
  const update = { x: value(x), y: value(y), x2: value(x2), y2: value(y2), stroke: value(colour), strokeWidth: value(width) };
  return { type: 'rule', encode: { update } };
}

function dot(x: number, y: number, size: number): Mark {
  const update = { x: value(x), y: value(y), size: value(size), fill: value('white'), stroke: value(INK), strokeWidth: value(1.2) };
  return { type: 'symbol', encode: { update } };
}

function swatch(kind: KeyEntry['kind'], x: number, y: number): Mark[] {
  const box: Mark = {
    type: 'rect',
    encode: {
      update: {
        x: value(x),
        y: value(y),
        width: value(BOX.width),
        height: value(BOX.height),
        fill: value(kind === 'doubtful' ? '#2a788e' : EMPTY_FILL),
      },
    },
  };
  const [right, bottom, middle] = [x + BOX.width, y + BOX.height, y + BOX.height / 2];
  switch (kind) {
    case 'boundary':
      return [stroke(x, middle, right, middle, INK, 2), dot(x + BOX.width / 2, middle, 30)];
    case 'hollow':
      return [dot(x + BOX.width / 2, middle, 40)];
    case 'doubtful':
      return [box, dot(x + BOX.width / 2, middle, 36)];
    case 'missing':
      return [box, stroke(x, bottom, right, y, '#9a9a9a', 1)];
    case 'failed':
      return [box, stroke(x, bottom, right, y, '#b3261e', 1.2), stroke(x, y, right, bottom, '#b3261e', 1.2)];
    case 'undefined':
      return [box];
  }
}

/** Entries in rows of at most `width` pixels from (x, y); the height is 0 for an empty key. */
export function keyMarks(entries: readonly KeyEntry[], x: number, y: number, width: number): { marks: Mark[]; height: number } {
  let left = x;
  let top = y;
  const marks = entries.flatMap(({ kind, text }) => {
    const extent = BOX.width + 6 + textWidth(text, SIZE);
    if (left > x && left + extent > x + width) {
      left = x;
      top += BOX.height + 8;
    }
    const label: Mark = {
      type: 'text',
      encode: {
        update: {
          x: value(left + BOX.width + 6),
          y: value(top + BOX.height / 2),
          text: value(text),
          font: value(FONT),
          fontSize: value(SIZE),
          fill: value(INK),
          baseline: value('middle' as const),
        },
      },
    };
    const drawn = swatch(kind, left, top);
    left += extent + 16;
    return [...drawn, label];
  });
  return { marks, height: entries.length === 0 ? 0 : top - y + BOX.height + 14 };
}
