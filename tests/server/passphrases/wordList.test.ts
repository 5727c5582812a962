import { createHash } from 'node:crypto';
import { describe, expect, test } from 'vitest';
import { readEffLongList, WORDS } from '../../../server/passphrases/wordList.ts';

// EFF, July 2016; counts equal on four independently published copies of the list.
describe('the EFF long word list', () => {
  const list = readEffLongList();

  test('7776 distinct words of 3 to 9 letters, abacus to zoom', () => {
    expect(list).toHaveLength(6 ** 5);
    expect(new Set(list).size).toBe(7776);
    expect([list[0], list[1], list.at(-1)]).toEqual(['abacus', 'abdomen', 'zoom']);
    const byLength: Record<number, number> = {};
    for (const word of list) byLength[word.length] = (byLength[word.length] ?? 0) + 1;
    expect(byLength).toEqual({ 3: 82, 4: 467, 5: 928, 6: 1372, 7: 1591, 8: 1779, 9: 1557 });
    const letters = list.reduce((sum, word) => sum + word.length, 0);
    expect(letters / list.length).toBeCloseTo(6.99177, 5);
    expect(list.every((word) => /^[a-z-]+$/.test(word))).toBe(true);
  });

  test('the words alone have the published checksum', () => {
    const text = list.map((word) => `${word}\n`).join('');
    expect(createHash('sha256').update(text).digest('hex')).toBe(
      '6d557f0693958fb5e650b68b5bee585eb82cf4da32965505c789e924743bc522',
    );
  });

  test('with the dice numbers put back it is the file as published', () => {
    const rows = list.map((word, index) => {
      const digits = index.toString(6).padStart(5, '0');
      return `${digits.replace(/./g, (digit) => String(Number(digit) + 1))}\t${word}\n`;
    });
    expect(createHash('sha256').update(rows.join('')).digest('hex')).toBe(
      'addd35536511597a02fa0a9ff1e5284677b8883b83e986e43f15a3db996b903e',
    );
  });

  test('no word begins another', () => {
    const sorted = [...list].sort();
    const pairs = sorted.filter((word, index) => sorted[index + 1]?.startsWith(word));
    expect(pairs).toEqual([]);
  });

  test('passphrases are drawn from the 7772 without a hyphen', () => {
    expect(WORDS).toHaveLength(7772);
    expect(list.filter((word) => !WORDS.includes(word))).toEqual([
      'drop-down',
      'felt-tip',
      't-shirt',
      'yo-yo',
    ]);
    expect(Math.log2(WORDS.length)).toBeCloseTo(12.92407, 5);
  });
});
