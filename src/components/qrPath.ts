/** A QR symbol's modules, row by row; anything but 0 is dark. */
export interface QrMatrix {
  size: number;
  data: ArrayLike<number | boolean>;
}

/** Modules left light on each side (ISO/IEC 18004, section on the quiet zone). */
export const QUIET_ZONE = 4;

/** One SVG path of the dark modules, runs merged along each row, offset by the quiet zone. */
export function qrPath({ size, data }: QrMatrix): string {
  let path = '';
  for (let row = 0; row < size; row += 1) {
    let column = 0;
    while (column < size) {
      const start = column;
      while (column < size && data[row * size + column]) column += 1;
      if (column > start) {
        const width = column - start;
        path += `M${start + QUIET_ZONE} ${row + QUIET_ZONE}h${width}v1h-${width}z`;
      }
      column += 1;
    }
  }
  return path;
}
