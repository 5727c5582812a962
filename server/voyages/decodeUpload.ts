import { CSV_MAX_BYTES } from '../../shared/rules/limits.ts';
import { AppError, invalid } from '../errors.ts';

export interface Decoded {
  readonly text: string;
  readonly encoding: 'UTF-8' | 'UTF-16' | 'Latin-1';
}

/**
 * An uploaded list as text. A byte order mark decides; without one, zeros on every second place mean UTF-16,
 * well-formed UTF-8 is that, and anything else is read as Windows-1252, which browsers and spreadsheets mean by
 * Latin-1 (WHATWG Encoding, section 4.2). Throws `too_large`, and `invalid` for what is no text.
 */
export function decodeUpload(bytes: Buffer): Decoded {
  if (bytes.length > CSV_MAX_BYTES)
    throw new AppError('too_large', 'That file is more than 2 MB. Send the list alone.');
  const decoded = decode(bytes);
  if (decoded.text.includes('\0')) throw noText();
  return decoded;
}

const noText = () =>
  invalid({ base64: ['This is not a text file. Save the list as CSV from the spreadsheet and send that.'] });

function decode(bytes: Buffer): Decoded {
  const [one, two] = bytes;
  if (one === 0xff && two === 0xfe) return utf16(bytes, 'utf-16le');
  if (one === 0xfe && two === 0xff) return utf16(bytes, 'utf-16be');
  const order = zerosSay(bytes);
  if (order !== null) return utf16(bytes, order);
  try {
    return { text: new TextDecoder('utf-8', { fatal: true }).decode(bytes), encoding: 'UTF-8' };
  } catch {
    return { text: new TextDecoder('windows-1252').decode(bytes), encoding: 'Latin-1' };
  }
}

function utf16(bytes: Buffer, label: 'utf-16le' | 'utf-16be'): Decoded {
  try {
    return { text: new TextDecoder(label, { fatal: true }).decode(bytes), encoding: 'UTF-16' };
  } catch {
    throw noText();
  }
}

/** UTF-16 without its mark: in European text nearly every second octet is zero, and always the same second. */
function zerosSay(bytes: Buffer): 'utf-16le' | 'utf-16be' | null {
  const sample = bytes.subarray(0, 4096);
  if (sample.length < 4 || bytes.length % 2 !== 0) return null;
  const zeros = [0, 0];
  for (const [index, octet] of sample.entries())
    if (octet === 0) zeros[index % 2] = (zeros[index % 2] ?? 0) + 1;
  const [even = 0, odd = 0] = zeros;
  const most = sample.length / 2;
  if (odd > most * 0.7 && even < most * 0.1) return 'utf-16le';
  if (even > most * 0.7 && odd < most * 0.1) return 'utf-16be';
  return null;
}
