/**
 * Lexend as its package ships it has figures of differing widths and no feature to even them out. This makes a font
 * of the ten figures alone, all equally wide, for columns and clocks on the screens. The results are kept in
 * `src/app/fonts/`; a test compares them with what this makes.
 *
 * Source: OpenType 1.9, tables cmap (format 4), glyf, head, hhea, hmtx, loca, maxp, OS/2, post.
 */
import { assemble } from './woff.ts';

const FIRST_FIGURE = 0x30;
const FIGURES = 10;
const GLYPHS = FIGURES + 1;

const TRUETYPE = 0x00010000;

type Tables = ReadonlyMap<string, Buffer>;

function readTables(ttf: Buffer): Tables {
  const tables = new Map<string, Buffer>();
  for (let index = 0; index < ttf.readUInt16BE(4); index += 1) {
    const entry = 12 + index * 16;
    const offset = ttf.readUInt32BE(entry + 8);
    tables.set(
      ttf.toString('latin1', entry, entry + 4),
      ttf.subarray(offset, offset + ttf.readUInt32BE(entry + 12)),
    );
  }
  return tables;
}

function table(tables: Tables, tag: string): Buffer {
  const found = tables.get(tag);
  if (!found) throw new Error(`The font has no ${tag} table.`);
  return Buffer.from(found);
}

/** Glyph of a character by the font's cmap subtable of format 4. */
function glyphOf(cmap: Buffer, codePoint: number): number {
  for (let index = 0; index < cmap.readUInt16BE(2); index += 1) {
    const at = cmap.readUInt32BE(4 + index * 8 + 4);
    if (cmap.readUInt16BE(at) !== 4) continue;
    const twice = cmap.readUInt16BE(at + 6);
    for (let segment = 0; segment < twice; segment += 2) {
      if (codePoint > cmap.readUInt16BE(at + 14 + segment)) continue;
      const start = cmap.readUInt16BE(at + 16 + twice + segment);
      if (codePoint < start) break;
      const delta = cmap.readUInt16BE(at + 16 + 2 * twice + segment);
      const rangeAt = at + 16 + 3 * twice + segment;
      const range = cmap.readUInt16BE(rangeAt);
      if (range === 0) return (codePoint + delta) & 0xffff;
      return cmap.readUInt16BE(rangeAt + range + 2 * (codePoint - start));
    }
  }
  throw new Error(`The font does not map U+${codePoint.toString(16)}.`);
}

function outline(tables: Tables, glyph: number): Buffer {
  const long = table(tables, 'head').readInt16BE(50) === 1;
  const loca = table(tables, 'loca');
  const at = (index: number) => (long ? loca.readUInt32BE(index * 4) : loca.readUInt16BE(index * 2) * 2);
  const data = Buffer.from(table(tables, 'glyf').subarray(at(glyph), at(glyph + 1)));
  if (data.readInt16BE(0) < 0)
    throw new Error('A figure is made of other glyphs, which is not provided for.');
  return data;
}

function figureCmap(): Buffer {
  const cmap = Buffer.alloc(12 + 32);
  cmap.writeUInt16BE(1, 2);
  cmap.writeUInt16BE(3, 4);
  cmap.writeUInt16BE(1, 6);
  cmap.writeUInt32BE(12, 8);
  const format4 = [4, 32, 0, 4, 4, 1, 0, FIRST_FIGURE + FIGURES - 1, 0xffff, 0, FIRST_FIGURE, 0xffff];
  format4.push((0x10000 + 1 - FIRST_FIGURE) & 0xffff, 1, 0, 0);
  format4.forEach((value, index) => {
    cmap.writeUInt16BE(value, 12 + index * 2);
  });
  return cmap;
}

/**
 * A font of the ten figures, each as wide as `width` font units and centred in it, from a TrueType font that holds
 * them as simple outlines.
 * @throws Error when a table or a figure is missing.
 */
export function evenFigures(ttf: Buffer, width: number): Buffer {
  const tables = readTables(ttf);
  const cmap = table(tables, 'cmap');
  const glyphs = Array.from({ length: FIGURES }, (_, index) =>
    outline(tables, glyphOf(cmap, FIRST_FIGURE + index)),
  );

  const hmtx = Buffer.alloc(GLYPHS * 4);
  const loca = Buffer.alloc((GLYPHS + 1) * 4);
  hmtx.writeUInt16BE(width, 0);
  let length = 0;
  glyphs.forEach((glyph, index) => {
    const [left, right] = [glyph.readInt16BE(2), glyph.readInt16BE(6)];
    hmtx.writeUInt16BE(width, (index + 1) * 4);
    hmtx.writeInt16BE(Math.round((width - (right - left)) / 2), (index + 1) * 4 + 2);
    loca.writeUInt32BE(length, (index + 1) * 4);
    length += (glyph.length + 3) & ~3;
  });
  loca.writeUInt32BE(length, GLYPHS * 4);
  const glyf = Buffer.concat(
    glyphs.map((glyph) => Buffer.concat([glyph, Buffer.alloc((4 - (glyph.length % 4)) % 4)])),
  );

  const head = table(tables, 'head');
  head.writeInt16BE(1, 50);
  // Flag 1, "left side bearing at x = 0", no longer holds once figures are centred.
  head.writeUInt16BE(head.readUInt16BE(16) & ~2, 16);
  const hhea = table(tables, 'hhea');
  hhea.writeUInt16BE(width, 10);
  hhea.writeUInt16BE(GLYPHS, 34);
  const maxp = table(tables, 'maxp');
  maxp.writeUInt16BE(GLYPHS, 4);
  const os2 = table(tables, 'OS/2');
  os2.writeUInt16BE(FIRST_FIGURE, 64);
  os2.writeUInt16BE(FIRST_FIGURE + FIGURES - 1, 66);
  const post = Buffer.alloc(32);
  table(tables, 'post').copy(post, 0, 0, 32);
  post.writeUInt32BE(0x00030000, 0);

  const made: Record<string, Buffer> = {
    'OS/2': os2,
    cmap: figureCmap(),
    glyf,
    head,
    hhea,
    hmtx,
    loca,
    maxp,
    name: table(tables, 'name'),
    post,
  };
  return assemble(
    TRUETYPE,
    Object.entries(made).map(([tag, data]) => ({ tag, data })),
  );
}
