import QRCode from 'qrcode';

/** Printing positions: 1/200 inch. Edges on this grid fall on whole dots at 200 and 600 dpi. */
export const GRID_PT = 0.36;

/** Modules of white on each side. Source: ISO/IEC 18004, quiet zone. */
export const QUIET_MODULES = 4;

/** 0.4 mm, the least we print: over four dots at 300 dpi (DENSO WAVE's guidance on module size). */
export const LEAST_MODULE_PT = (0.4 * 72) / 25.4;

/** Added to a symbol's place on the grid when it is drawn; less than a hundredth of a dot. */
export const EDGE_SHIFT_PT = 0.002;

export interface QrRoom {
  /** Points for the symbol with its quiet zone, both ways. */
  readonly boxPt: number;
  /** The module is never made larger than this, in points. */
  readonly mostModulePt: number;
}

export interface QrSymbol {
  /** Modules along one side, without the quiet zone. */
  readonly modules: number;
  readonly level: 'M' | 'Q';
  readonly modulePt: number;
  /** Side in points including the quiet zone. */
  readonly boxPt: number;
  /** PDF path operators in units of one module, dark runs of each row merged, then one fill. */
  readonly path: string;
}

/**
 * The symbol of a payload at the largest module the room allows. Error correction is Q (25 %)
 * where it costs nothing in module size, M (15 %) otherwise.
 * @throws RangeError when not even the smallest module fits the room.
 */
export function qrSymbol(payload: string, room: QrRoom): QrSymbol {
  const medium = moduleSize(sizeOf(payload, 'M'), room);
  const strong = moduleSize(sizeOf(payload, 'Q'), room);
  const level = strong >= medium ? 'Q' : 'M';
  const modulePt = Math.max(strong, medium);
  if (modulePt < LEAST_MODULE_PT) {
    throw new RangeError("The network's name and password make too large a code for this card.");
  }
  const { size: modules, data } = QRCode.create(payload, { errorCorrectionLevel: level }).modules;
  const boxPt = (modules + 2 * QUIET_MODULES) * modulePt;
  return { modules, level, modulePt, boxPt, path: runs(data, modules) };
}

/** Modules along one side. The mask does not change it, and a given one skips the search for it. */
function sizeOf(payload: string, level: 'M' | 'Q'): number {
  return QRCode.create(payload, { errorCorrectionLevel: level, maskPattern: 0 }).modules.size;
}

function moduleSize(modules: number, room: QrRoom): number {
  const across = modules + 2 * QUIET_MODULES;
  const most = Math.min(room.mostModulePt, room.boxPt / across);
  return Math.floor(most / GRID_PT + 1e-9) * GRID_PT;
}

/**
 * Each run ends two thousandths of a module early. Rasterisers count a dot as touched when an edge
 * lies exactly on its border, and that faint grey line cost one symbol in a hundred when ten were
 * read from a sheet. With `EDGE_SHIFT_PT` no edge lies on a border.
 */
function runs(cells: Uint8Array, modules: number): string {
  const parts: string[] = [];
  for (let row = 0; row < modules; row++) {
    let column = 0;
    while (column < modules) {
      const start = column;
      while (column < modules && cells[row * modules + column]) column++;
      if (column > start) parts.push(`${start} ${row} ${column - start - 1}.998 .998 re`);
      else column++;
    }
  }
  parts.push('f');
  return parts.join('\n');
}

/** The nearest position on the printing grid, in points. */
export function snap(points: number): number {
  return Math.round(points / GRID_PT) * GRID_PT;
}
