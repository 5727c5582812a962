import QRCode from 'qrcode';
import { describe, expect, it } from 'vitest';
import { GRID_PT, LEAST_MODULE_PT, qrSymbol } from '../../print/qr.ts';
import { WALLET_QR } from '../../print/wallet.ts';

/** ISO/IEC 18004, data capacities in byte mode: octets at L, M, Q and H for versions 1 to 10. */
const CAPACITY: [number, number, number, number][] = [
  [17, 14, 11, 7],
  [32, 26, 20, 14],
  [53, 42, 32, 24],
  [78, 62, 46, 34],
  [106, 84, 60, 44],
  [134, 106, 74, 58],
  [154, 122, 86, 64],
  [192, 152, 108, 84],
  [230, 180, 130, 98],
  [271, 213, 151, 119],
];

function version(octets: number, level: 'L' | 'M' | 'Q' | 'H'): number {
  const bytes = [{ data: new Uint8Array(octets).fill(0x61), mode: 'byte' as const }];
  return QRCode.create(bytes, { errorCorrectionLevel: level }).version;
}

describe('the encoder', () => {
  it.each(CAPACITY.map((row, i) => [i + 1, row] as const))(
    'version %d holds what ISO/IEC 18004 says and not one octet more',
    (number, row) => {
      (['L', 'M', 'Q', 'H'] as const).forEach((level, i) => {
        const octets = row[i] ?? 0;
        expect(version(octets, level)).toBe(number);
        expect(version(octets + 1, level)).toBe(number + 1);
      });
    },
  );
});

describe('the symbol on a card', () => {
  const lowerCase = (octets: number) => 'a'.repeat(octets);

  it.each([
    // 62 octets: version 4 at M, 33 modules; Q would need 41 and a smaller module.
    [62, 33, 'M', 2.88],
    // 46 octets: version 4 at Q too, so the stronger level costs nothing.
    [46, 33, 'Q', 2.88],
    // 113 octets, 32 of name and 63 of passphrase without escapes: version 7 at M.
    [113, 45, 'M', 2.16],
    // 213 octets, version 10 at M.
    [213, 57, 'M', 1.8],
    // 219 octets, everything escaped: version 11 at M, 61 modules.
    [219, 61, 'M', 1.8],
  ] as const)('%d octets take %d modules at %s of %d pt', (octets, modules, level, modulePt) => {
    const symbol = qrSymbol(lowerCase(octets), WALLET_QR);
    expect(symbol).toMatchObject({ modules, level });
    expect(symbol.modulePt).toBeCloseTo(modulePt, 9);
  });

  it('is never finer than 0.4 mm a module and always on the printing grid', () => {
    for (let octets = 20; octets <= 219; octets++) {
      const { modulePt, boxPt } = qrSymbol(lowerCase(octets), WALLET_QR);
      expect(modulePt).toBeGreaterThanOrEqual(LEAST_MODULE_PT);
      expect(Math.abs(modulePt / GRID_PT - Math.round(modulePt / GRID_PT))).toBeLessThan(1e-9);
      expect(boxPt).toBeLessThanOrEqual(WALLET_QR.boxPt + 1e-9);
    }
  });

  it('refuses a payload that would come out too fine', () => {
    expect(() => qrSymbol(lowerCase(900), WALLET_QR)).toThrow('too large a code');
  });
});
