import { describe, expect, test } from 'vitest';
import { fleetSentence } from '../../../shared/rules/fleetSentence.ts';

const of = (given: Partial<Parameters<typeof fleetSentence>[0]>) =>
  fleetSentence({
    vessels: 46,
    networks: 138,
    ageUnknown: 0,
    pastLimit: 0,
    pastLimitExposed: 0,
    heldByDeparted: 0,
    exposed: 0,
    ...given,
  });

describe('the first line of the fleet', () => {
  test.each([
    [
      { pastLimit: 9, pastLimitExposed: 4, heldByDeparted: 5, exposed: 5 },
      '9 networks are past their limit. On 4 of them, people who have left still hold the live passphrase.',
    ],
    [
      { pastLimit: 9, pastLimitExposed: 1, heldByDeparted: 1, exposed: 1 },
      '9 networks are past their limit. On 1 of them, people who have left still hold the live passphrase.',
    ],
    [
      { pastLimit: 3, pastLimitExposed: 3, heldByDeparted: 3, exposed: 3 },
      '3 networks are past their limit. On all 3 of them, people who have left still hold the live passphrase.',
    ],
    [
      { pastLimit: 1, pastLimitExposed: 1, heldByDeparted: 1, exposed: 1 },
      '1 network is past its limit. People who have left still hold its live passphrase.',
    ],
    [{ pastLimit: 1 }, '1 network is past its limit. Nobody who has left holds a live passphrase.'],
    [{ pastLimit: 2 }, '2 networks are past their limit. Nobody who has left holds a live passphrase.'],
    [
      { pastLimit: 2, heldByDeparted: 1, exposed: 1 },
      '2 networks are past their limit. On 1 other, people who have left still hold the live passphrase.',
    ],
    [
      { pastLimit: 2, heldByDeparted: 3, exposed: 3 },
      '2 networks are past their limit. On 3 others, people who have left still hold the live passphrase.',
    ],
    [{}, 'All 138 networks are within their limit. Nobody who has left holds a live passphrase.'],
    [{ networks: 1 }, 'The one network is within its limit. Nobody who has left holds a live passphrase.'],
    [
      { heldByDeparted: 2, exposed: 2 },
      'All 138 networks are within their limit. On 2, people who have left still hold the live passphrase.',
    ],
    [
      { exposed: 1 },
      'All 138 networks are within their limit. On 1, a lost card or a reported leak gives the live passphrase away.',
    ],
    [
      { ageUnknown: 1 },
      '137 networks are within their limit. Nobody who has left holds a live passphrase. On 1 no passphrase is on record, so its age cannot be told.',
    ],
    [
      { ageUnknown: 3, pastLimit: 2 },
      '2 networks are past their limit. Nobody who has left holds a live passphrase. On 3 no passphrase is on record, so their age cannot be told.',
    ],
    [{ ageUnknown: 138 }, 'No passphrase is on record yet, so no age can be told.'],
    [{ networks: 0 }, 'None of the 46 vessels of this fleet has networks yet.'],
    [{ networks: 0, vessels: 1 }, 'The one vessel of this fleet has no networks yet.'],
    [{ networks: 0, vessels: 0 }, 'There are no vessels in this fleet yet.'],
  ])('%j', (figures, sentence) => {
    expect(of(figures)).toBe(sentence);
  });
});
