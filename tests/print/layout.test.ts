import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { type CardFormat, type CardInput, renderCards } from '../../print/cards.ts';
import { CARD_MESSAGES } from '../../shared/messages/card.ts';
import { pdfInfo, pdfText, pdfWords, type TextBox } from '../support/decode.ts';
import { card, FULL_CARDS, HARD_CARDS } from './sampleCards.ts';

const MM = 72 / 25.4;
const SIZES = { wallet: [85.6 * MM, 53.98 * MM], cabin: [105 * MM, 148 * MM] } as const;
const FORMATS: CardFormat[] = ['wallet', 'wallet-sheet', 'cabin'];

/** Line ends and the spaces of running text are the layout's own; nothing else may differ. */
const inked = (text: string) => text.replace(/\s+/gu, '');

async function pages(format: CardFormat, cards: readonly CardInput[]): Promise<string[]> {
  const text = await pdfText(await renderCards({ format, cards }));
  return text.split('\f').map(inked);
}

describe('what stands on the card', () => {
  it('carries the network, password, valid-from line and serial on the front', async () => {
    const [front, back] = await pages('wallet', [card({ guestName: 'Livia Quaranta', cabin: 'Port VIP' })]);
    expect(front).toBe(
      inked(
        'Network Tamarisk Guests Password maple-sextant-orbit-velvet-drum From Sun 14 June, 11:00 M-1185',
      ),
    );
    expect(back).toBe(
      inked(
        `Tamarisk Welcome aboard. Wi-Fi for our guests. ${CARD_MESSAGES.en.handBack} Livia Quaranta, Port VIP`,
      ),
    );
  });

  it("says so in the card's own language, whatever the others in the file speak", async () => {
    for (const format of FORMATS) {
      const text = (await pages(format, FULL_CARDS)).join('');
      for (const { language, audience, ssid, passphrase, validFrom, serial } of FULL_CARDS) {
        const words = CARD_MESSAGES[language];
        const said = [words.network, words.password, words.welcome, words.audience[audience]];
        said.push(...words.caution, ssid, passphrase, validFrom ?? '', serial, 'Livia Quaranta');
        said.push(format === 'cabin' ? words.instruction : words.handBack);
        for (const sentence of said) expect(text).toContain(inked(sentence));
      }
    }
  });

  it("shows the caution only while the boat is on the dock's network", async () => {
    const caution = inked(CARD_MESSAGES.en.caution[0]);
    for (const format of FORMATS) {
      expect((await pages(format, [card({ cautionDock: true })])).join('')).toContain(caution);
      expect((await pages(format, [card()])).join('')).not.toContain(caution);
    }
  });

  it("puts the vessel's own welcome in place of ours and keeps whom the network is for", async () => {
    const pdf = await renderCards({
      format: 'cabin',
      cards: [card()],
      welcomeLine: 'Lovely to have you with us.',
    });
    const text = inked(await pdfText(pdf));
    expect(text).toContain(inked('Lovely to have you with us. Wi-Fi for our guests.'));
    expect(text).not.toContain(inked('Welcome aboard.'));
  });

  it('leaves the valid-from line out for a passphrase in force', async () => {
    const text = (await pages('wallet', [card({ validFrom: null })])).join('');
    expect(text).not.toContain('From');
    expect(text).toContain('M-1185');
  });

  it("names nobody and gives no password in the file's own data; says its language", async () => {
    const pdf = await renderCards({
      format: 'cabin',
      cards: [card({ language: 'it', guestName: 'Livia Quaranta' })],
    });
    const info = await pdfInfo(pdf);
    expect(info.get('Title')).toBe('Join card');
    const outside = Buffer.from(pdf).toString('latin1');
    expect(outside).toContain('/Lang (it)');
    expect(outside).not.toMatch(/Livia|Quaranta|Tamarisk|sextant|WIFI:/u);
  });
});

describe('nothing is clipped, lost or laid over anything else', () => {
  it.each(FORMATS)('%s: 32 octets of name and 63 characters of password come out whole', async (format) => {
    const found = await pages(format, HARD_CARDS);
    const step = format === 'wallet' ? 2 : 1;
    HARD_CARDS.forEach(({ ssid, passphrase, language, vesselName }, i) => {
      const text = format === 'wallet-sheet' ? found.join('') : (found[i * step] ?? '');
      expect(text).toContain(inked(CARD_MESSAGES[language].network + ssid));
      expect(text).toContain(inked(CARD_MESSAGES[language].password + passphrase));
      expect(found.join('')).toContain(inked(vesselName));
    });
  });

  it.each(['wallet', 'cabin'] as const)(
    '%s: every word on the card and clear of the others',
    async (format) => {
      const longest = card({
        vesselName: 'Most Serene Lady '.repeat(7).trim(),
        guestName: 'Wilhelmina Montgomery '.repeat(5).trim(),
        cabin: 'Bridge deck, forward, starboard suite with balcony',
        cautionDock: true,
        language: 'de',
        ssid: 'W'.repeat(32),
        passphrase: 'W'.repeat(63),
      });
      const words = await pdfWords(
        await renderCards({ format, cards: [...FULL_CARDS, ...HARD_CARDS, longest] }),
      );
      expect(words.length).toBeGreaterThan(300);
      const [width, height] = SIZES[format];
      for (const word of words) {
        expect(word.xMin, word.text).toBeGreaterThan(8);
        expect(word.xMax, word.text).toBeLessThan(width - 8);
        expect(word.yMin, word.text).toBeGreaterThan(5);
        expect(word.yMax, word.text).toBeLessThan(height - 4);
      }
      expect(overlaps(words)).toEqual([]);
    },
  );

  it('breaks a password only after its separators, and adds no hyphen where it has none', async () => {
    const lines = async (passphrase: string) => {
      const text = await pdfText(await renderCards({ format: 'wallet', cards: [card({ passphrase })] }));
      const all = text.split('\n');
      return all.slice(
        all.indexOf('Password') + 1,
        all.findIndex((line) => line.startsWith('From')),
      );
    };
    const words = await lines('maple-sextant-orbit-velvet-drum-lantern-harbour-quay');
    expect(words.length).toBeGreaterThan(1);
    expect(words.join('')).toBe('maple-sextant-orbit-velvet-drum-lantern-harbour-quay');
    for (const line of words.slice(0, -1)) expect(line.endsWith('-')).toBe(true);
    const unbroken = await lines('q'.repeat(63));
    expect(unbroken.length).toBeGreaterThan(1);
    expect(unbroken.join('')).toBe('q'.repeat(63));
  });

  it('prints any password of printable ASCII as it is (IEEE 802.11i-2004 H.4.1)', async () => {
    const ascii = fc.string({
      unit: fc.integer({ min: 0x21, max: 0x7e }).map((code) => String.fromCharCode(code)),
      minLength: 8,
      maxLength: 63,
    });
    const cards = fc.sample(ascii, { seed: 7, numRuns: 120 }).map((passphrase) => card({ passphrase }));
    const found = await pages('cabin', cards);
    cards.forEach(({ passphrase }, i) => {
      expect(found[i]).toContain(`Password${passphrase}`);
    });
  });
});

/** Pairs of words whose letters meet. A line's box is taller than its letters by about a fifth. */
function overlaps(words: readonly TextBox[]): string[] {
  const found: string[] = [];
  for (const [i, a] of words.entries()) {
    for (const b of words.slice(i + 1)) {
      if (a.page !== b.page) continue;
      const trim = 0.11 * Math.max(a.yMax - a.yMin, b.yMax - b.yMin);
      const across = Math.min(a.xMax, b.xMax) - Math.max(a.xMin, b.xMin);
      const down = Math.min(a.yMax, b.yMax) - Math.max(a.yMin, b.yMin) - 2 * trim;
      if (across > 0.1 && down > 0.1) found.push(`${a.text} / ${b.text}`);
    }
  }
  return found;
}
