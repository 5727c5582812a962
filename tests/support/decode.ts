import { execFile } from 'node:child_process';
import { mkdtemp, readdir, readFile, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { promisify } from 'node:util';
import jsQR from 'jsqr';

/** What a printed page says to the programs people own, not to our own code: Poppler and ZBar. */

const run = promisify(execFile);

/** A page as grey values, 0 black to 255 white, row by row from the top. */
export interface GreyPage {
  readonly width: number;
  readonly height: number;
  readonly grey: Uint8Array;
}

async function withFile<T>(pdf: Uint8Array, use: (file: string, folder: string) => Promise<T>): Promise<T> {
  const folder = await mkdtemp(join(tmpdir(), 'quayword-decode-'));
  try {
    const file = join(folder, 'file.pdf');
    await writeFile(file, pdf);
    return await use(file, folder);
  } finally {
    await rm(folder, { recursive: true, force: true });
  }
}

/**
 * Every Wi-Fi payload that zbarimg reads from the pages, rasterised by pdftoppm; pages in order, the
 * symbols of one page in the order they are found.
 * @throws when pdftoppm or zbarimg is missing or fails.
 */
export async function decodePdf(pdf: Uint8Array, { dpi = 200 }: { dpi?: number } = {}): Promise<string[]> {
  return withFile(pdf, async (file, folder) => {
    await run('pdftoppm', ['-r', String(dpi), '-png', file, join(folder, 'page')]);
    const pages = (await readdir(folder)).filter((name) => name.endsWith('.png')).sort();
    const found: string[][] = [];
    for (const page of pages) found.push(await decodeImage(join(folder, page)));
    return found.flat();
  });
}

/**
 * Binary mode, because zbarimg otherwise guesses at encodings and turns UTF-8 into something else.
 * In it nothing stands between two symbols, so they are cut where one payload's double semicolon
 * meets the next one's scheme.
 */
export async function decodeImage(file: string): Promise<string[]> {
  try {
    const { stdout } = await run('zbarimg', ['--raw', '-q', '-Sbinary', file], {
      encoding: 'buffer',
    });
    return stdout
      .toString('utf8')
      .split(/(?<=;;)(?=WIFI:)/u)
      .filter((text) => text !== '');
  } catch (error) {
    const NOTHING_FOUND = 4;
    if (error instanceof Error && 'code' in error && error.code === NOTHING_FOUND) return [];
    throw error;
  }
}

/** A symbol found on a page; lengths in dots of the raster, from its top left corner. */
export interface FoundSymbol {
  readonly text: string;
  readonly left: number;
  readonly top: number;
  readonly side: number;
  /** Modules along one side, without the quiet zone. */
  readonly modules: number;
  readonly page: GreyPage;
}

/** The one symbol of a page, by another decoder than ZBar; null when it sees none. */
export async function decodeWithJsqr(
  pdf: Uint8Array,
  at: { page?: number; dpi?: number } = {},
): Promise<FoundSymbol | null> {
  const page = await rasterPage(pdf, at);
  const rgba = new Uint8ClampedArray(page.width * page.height * 4);
  for (const [i, value] of page.grey.entries()) rgba.set([value, value, value, 255], i * 4);
  const found = jsQR(rgba, page.width, page.height);
  if (found === null) return null;
  const { topLeftCorner, topRightCorner } = found.location;
  return {
    text: Buffer.from(found.binaryData).toString('utf8'),
    left: topLeftCorner.x,
    top: topLeftCorner.y,
    side: topRightCorner.x - topLeftCorner.x,
    modules: 17 + 4 * found.version,
    page,
  };
}

/** One page as grey values, through pdftoppm. */
export async function rasterPage(
  pdf: Uint8Array,
  { page = 1, dpi = 200 }: { page?: number; dpi?: number } = {},
): Promise<GreyPage> {
  return withFile(pdf, async (file, folder) => {
    const only = ['-f', String(page), '-l', String(page), '-singlefile'];
    await run('pdftoppm', ['-r', String(dpi), '-gray', ...only, file, join(folder, 'page')]);
    const pgm = await readFile(join(folder, 'page.pgm'));
    const header = /^P5\s+(\d+)\s+(\d+)\s+255\s/u.exec(pgm.toString('latin1', 0, 64));
    if (header === null) throw new Error('pdftoppm wrote no grey page.');
    const [width, height] = [Number(header[1]), Number(header[2])];
    return { width, height, grey: new Uint8Array(pgm.subarray(header[0].length)) };
  });
}

/** The text of the pages in the order it was drawn, form feeds between pages. */
export async function pdfText(pdf: Uint8Array): Promise<string> {
  return withFile(pdf, async (file) => {
    const { stdout } = await run('pdftotext', ['-raw', '-enc', 'UTF-8', file, '-']);
    return stdout;
  });
}

export interface TextBox {
  readonly page: number;
  readonly text: string;
  /** Points from the page's top left corner. */
  readonly xMin: number;
  readonly yMin: number;
  readonly xMax: number;
  readonly yMax: number;
}

/** Where each word stands, through pdftotext. */
export async function pdfWords(pdf: Uint8Array): Promise<TextBox[]> {
  return withFile(pdf, async (file) => {
    const { stdout } = await run('pdftotext', ['-bbox', '-enc', 'UTF-8', file, '-']);
    const words: TextBox[] = [];
    let page = 0;
    for (const line of stdout.split('\n')) {
      if (line.includes('<page ')) page++;
      const word = /xMin="(.+?)" yMin="(.+?)" xMax="(.+?)" yMax="(.+?)">(.*)<\/word>/u.exec(line);
      if (word === null) continue;
      const [xMin = 0, yMin = 0, xMax = 0, yMax = 0] = word.slice(1, 5).map(Number);
      words.push({ page, text: unescapeXml(word[5] ?? ''), xMin, yMin, xMax, yMax });
    }
    return words;
  });
}

function unescapeXml(text: string): string {
  const named: Record<string, string> = { lt: '<', gt: '>', quot: '"', apos: "'", amp: '&' };
  return text.replace(/&(\w+);/gu, (whole, name: string) => named[name] ?? whole);
}

/** Each page's media box as written in the file: width and height in points. */
export function pdfBoxes(pdf: Uint8Array): [width: number, height: number][] {
  const written = Buffer.from(pdf).toString('latin1');
  return [...written.matchAll(/\/MediaBox \[0 0 ([\d.]+) ([\d.]+)\]/gu)].map((box) => [
    Number(box[1]),
    Number(box[2]),
  ]);
}

/** The figures pdfinfo prints, by their labels. */
export async function pdfInfo(pdf: Uint8Array): Promise<Map<string, string>> {
  return withFile(pdf, async (file) => {
    const { stdout } = await run('pdfinfo', [file]);
    const lines = stdout.split('\n').map((line) => /^([^:]+):\s*(.*)$/u.exec(line));
    return new Map(lines.flatMap((line) => (line ? [[line[1] ?? '', line[2] ?? '']] : [])));
  });
}
