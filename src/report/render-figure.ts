/**
 * Renders a Vega specification to SVG and PNG without a display or a browser.
 *
 * PNG text is drawn with the fonts that come with the program, so that a machine without fonts gives the same picture. SVG names the
 * same font with common ones behind it. Errors: report.unwritable from `writeFigure`.
 */
import { mkdir, writeFile } from 'node:fs/promises';
import { createRequire } from 'node:module';
import { dirname, join } from 'node:path';
import { Resvg } from '@resvg/resvg-js';
import { parse, type Spec, View } from 'vega';
import { WindrowError } from '../core/errors.js';
import { FONT } from './figure-parts.js';

/** Pixels of a PNG for each unit of the figure: 2.5 gives about 240 dots an inch at the printed size. */
const SCALE = 2.5;

export async function renderSvg(spec: Spec): Promise<string> {
  const view = new View(parse(spec), { renderer: 'none' });
  try {
    const svg = await view.toSVG();
    return svg.replaceAll(`font-family="${FONT}"`, `font-family="${FONT}, Verdana, Helvetica, sans-serif"`);
  } finally {
    view.finalize();
  }
}

function fontFiles(): string[] {
  const folder = join(dirname(createRequire(import.meta.url).resolve('dejavu-fonts-ttf/package.json')), 'ttf');
  return ['DejaVuSans.ttf', 'DejaVuSans-Bold.ttf', 'DejaVuSans-Oblique.ttf'].map((name) => join(folder, name));
}

export function renderPng(svg: string, scale: number = SCALE): Uint8Array {
  const image = new Resvg(svg, {
    fitTo: { mode: 'zoom', value: scale },
    background: 'white',
    font: { fontFiles: fontFiles(), loadSystemFonts: false, defaultFontFamily: FONT, sansSerifFamily: FONT },
  });
  return image.render().asPng();
}

/**
 * Writes `<folder>/<name>.svg` and `.png`, making the folder where needed.
 * @returns the two paths
 * @throws WindrowError `report.unwritable`
 */
export async function writeFigure(spec: Spec, folder: string, name: string): Promise<string[]> {
  const svg = await renderSvg(spec);
  const paths = [join(folder, `${name}.svg`), join(folder, `${name}.png`)];
  try {
    await mkdir(folder, { recursive: true });
    await writeFile(paths[0], svg);
    await writeFile(paths[1], renderPng(svg));
  } catch (cause) {
    throw new WindrowError('report.unwritable', 'a figure cannot be written', {
      where: folder,
      found: cause instanceof Error ? cause.message : String(cause),
      allowed: 'a folder that can be written to',
      cause,
    });
  }
  return paths;
}
