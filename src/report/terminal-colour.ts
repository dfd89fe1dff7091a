/** Colour in a terminal: how much there is, and blocks in the palette of the figures. */
export type ColourDepth = 'none' | '256' | 'truecolor';

/** Writes text on the palette's colour at a share of the range; null is the ground of cells without a value. */
export type Paint = (text: string, share: number | null, depth: ColourDepth) => string;

/** NO_COLOR (any value) and TERM=dumb turn colour off, as does output that is not a terminal (common practice). */
export function colourDepth(isTerminal: boolean, environment: { readonly [name: string]: string | undefined }): ColourDepth {
  if (!isTerminal || environment['TERM'] === 'dumb' || (environment['NO_COLOR'] ?? '') !== '') return 'none';
  return /truecolor|24bit/i.test(environment['COLORTERM'] ?? '') ? 'truecolor' : '256';
}

type Channels = readonly [number, number, number];

const GROUND: Channels = [70, 70, 70];

function channels(colour: string): Channels {
  const [red, green, blue] = (colour.match(/\d+/g) ?? []).map(Number);
  return [red ?? 0, green ?? 0, blue ?? 0];
}

/** The nearest colour of the 6 × 6 × 6 cube that 256-colour terminals have at 16 to 231. */
function cubeIndex(colour: Channels): number {
  const [red, green, blue] = colour.map((value) => (value < 48 ? 0 : value < 115 ? 1 : Math.floor((value - 35) / 40)));
  return 16 + 36 * red + 6 * green + blue;
}

/** A painter over any palette that maps a share between 0 and 1 to `rgb(r, g, b)`. */
export function painter(palette: (share: number) => string): Paint {
  return (text, share, depth) => {
    if (depth === 'none') return text;
    const ground = share === null ? GROUND : channels(palette(share));
    const [red, green, blue] = ground;
    // Ink that stands out: relative luminance with the weights of ITU-R BT.709.
    const ink = 0.2126 * red + 0.7152 * green + 0.0722 * blue > 110 ? 16 : 231;
    const background = depth === 'truecolor' ? `48;2;${red};${green};${blue}` : `48;5;${cubeIndex(ground)}`;
    return `\x1b[${background};38;5;${ink}m${text}\x1b[0m`;
  };
}

/** The perceptually uniform palette that the figures use. The plotting library is loaded here, not by every command that starts. */
export async function figurePainter(): Promise<Paint> {
  const { scheme } = await import('vega');
  return painter(scheme('viridis') as (share: number) => string);
}
