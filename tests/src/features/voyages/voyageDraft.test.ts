import { describe, expect, test } from 'vitest';
import { draftOf, type VoyageDraft, voyageOf } from '../../../../src/features/voyages/voyageDraft.ts';
import { fieldError } from '../../../../src/lib/errors.ts';

// Split is two hours ahead of UTC in summer and one in winter (IANA Europe/Zagreb).
const ZONE = 'Europe/Zagreb';
const DRAFT: VoyageDraft = {
  kind: 'charter',
  title: ' Brandvold party ',
  starts: '2026-06-13T15:00',
  ends: '2026-06-20T10:00',
  fromPort: 'Split',
  toPort: '  ',
};

describe('a voyage as it is typed', () => {
  test('is sent in UTC by ship’s time, with names trimmed and an empty port as none', () => {
    expect(voyageOf(DRAFT, ZONE)).toEqual({
      ok: true,
      voyage: {
        kind: 'charter',
        title: 'Brandvold party',
        startsAt: '2026-06-13T13:00:00.000Z',
        endsAt: '2026-06-20T08:00:00.000Z',
        fromPort: 'Split',
        toPort: null,
      },
    });
  });

  test('without a title is called by what it is', () => {
    const read = voyageOf({ ...DRAFT, kind: 'yard', title: '  ' }, ZONE);
    expect(read.ok && read.voyage.title).toBe('Yard period');
  });

  test.each([
    ['no beginning', { starts: '' }, 'startsAt', 'Give the date and time it begins'],
    ['no end', { ends: '' }, 'endsAt', 'Give the date and time it ends'],
    [
      'an end at its beginning',
      { ends: DRAFT.starts },
      'endsAt',
      'It ends after it begins; choose a later time',
    ],
  ])('%s is named at its field, and nothing is sent', (_what, change, field, sentence) => {
    const read = voyageOf({ ...DRAFT, ...change }, ZONE);
    expect(read.ok).toBe(false);
    expect(fieldError(read.ok ? null : read.error, field)).toBe(sentence);
  });

  test('read back into the boxes and sent again is the same voyage', () => {
    const read = voyageOf(DRAFT, ZONE);
    if (!read.ok) throw read.error;
    const again = voyageOf(draftOf({ id: 'a', ...read.voyage }, ZONE), ZONE);
    expect(again).toEqual(read);
  });
});
