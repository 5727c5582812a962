import { describe, expect, it } from 'vitest';
import { CARD_LANGUAGES, CARD_MESSAGES, validFromLine } from '../../shared/messages/card.ts';

describe('the valid-from line', () => {
  it.each([
    ['en', 'From Sun 14 June, 11:00'],
    ['fr', 'À partir du dim. 14 juin, 11 h 00'],
    ['it', 'Valida da dom 14 giugno, ore 11:00'],
    ['es', 'Válida desde el dom 14 de junio, 11:00'],
    ['de', 'Gültig ab So., 14. Juni, 11:00 Uhr'],
  ] as const)('in %s', (language, line) => {
    expect(validFromLine(language, '2026-06-14T09:00:00Z', 'Europe/Zagreb')).toBe(line);
    expect(validFromLine(language, '2026-06-14T11:00:00+02:00[Europe/Zagreb]', 'Europe/Zagreb')).toBe(line);
  });

  it("is in ship's time: the same instant is another day elsewhere", () => {
    const instant = '2026-06-14T22:30:00Z';
    expect(validFromLine('en', instant, 'Europe/London')).toBe('From Sun 14 June, 23:30');
    expect(validFromLine('en', instant, 'Europe/Athens')).toBe('From Mon 15 June, 01:30');
    expect(validFromLine('en', instant, 'America/Puerto_Rico')).toBe('From Sun 14 June, 18:30');
  });

  // Change of offset in the European Union: last Sunday of October, 01:00 UTC (IANA tz database).
  it('follows the change of the clocks', () => {
    expect(validFromLine('en', '2026-10-25T00:30:00Z', 'Europe/Paris')).toBe('From Sun 25 October, 02:30');
    expect(validFromLine('en', '2026-10-25T01:30:00Z', 'Europe/Paris')).toBe('From Sun 25 October, 02:30');
    expect(validFromLine('en', '2026-10-25T02:30:00Z', 'Europe/Paris')).toBe('From Sun 25 October, 03:30');
  });

  it('writes midnight as 00:00', () => {
    expect(validFromLine('de', '2026-01-01T00:00:00Z', 'Etc/UTC')).toBe(
      'Gültig ab Do., 1. Januar, 00:00 Uhr',
    );
  });

  it.each(['2026-06-14T11:00:00', '2026-06-14', 'soon', '2026-06-14T25:00:00Z', ''])(
    'refuses "%s", which names no instant',
    (iso) => {
      expect(() => validFromLine('en', iso, 'Europe/Zagreb')).toThrow(RangeError);
    },
  );

  it('refuses a zone nobody keeps', () => {
    expect(() => validFromLine('en', '2026-06-14T09:00:00Z', 'Europe/Atlantis')).toThrow(RangeError);
  });
});

describe('the words of the card', () => {
  it('are all there in every language, each its own', () => {
    for (const language of CARD_LANGUAGES) {
      const { audience, caution, ...rest } = CARD_MESSAGES[language];
      const said = [...Object.values(rest), ...caution, ...Object.values(audience)];
      expect(said).toHaveLength(11);
      for (const text of said) expect(text).toBe(text.trim());
      expect(said.every((text) => text.length > 0)).toBe(true);
    }
    const instructions = CARD_LANGUAGES.map((language) => CARD_MESSAGES[language].instruction);
    expect(new Set(instructions).size).toBe(CARD_LANGUAGES.length);
  });
});
