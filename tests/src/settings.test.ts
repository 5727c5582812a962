import { describe, expect, test } from 'vitest';
import type { VesselSettings } from '../../shared/api/vessels.ts';
import { vesselBody } from '../../shared/api/vessels.ts';
import { VESSEL_PERMISSIONS } from '../../shared/rules/permissions.ts';
import { permissionGroups } from '../../src/features/settings/permissionGroups.ts';
import { byDeck, moved, placesOf, rowsOf, withNew } from '../../src/features/settings/placeRows.ts';
import { bodyOf, differing, draftOf, follow } from '../../src/features/settings/vesselDraft.ts';
import { rolesInWords } from '../../src/lib/roleWords.ts';
import { allZones, searchZones, zoneInWords } from '../../src/lib/zones.ts';

const settings: VesselSettings = {
  id: '5f0c4f2e-6f5e-4a53-8a35-0c9b7c6a0d11',
  name: 'Tamarisk',
  kind: 'motor yacht',
  lengthM: 42,
  guestsMax: 8,
  homePort: 'Split',
  ownerName: null,
  lying: 'Split, berth C14',
  source: 'dock',
  retentionDays: 90,
  secondFactorRoles: ['captain'],
  serialPrefix: 'M',
  driver: 'by_hand',
  dealer: null,
  zones: [],
  cabins: [],
  accessPoints: [],
  updatedAt: '2026-06-14T09:00:00.000Z',
};

describe('what is typed about a vessel', () => {
  const before = draftOf(settings);

  test('goes out as it came in when nothing is typed', () => {
    const parsed = vesselBody.parse(bodyOf(before, settings));
    const { id, driver, dealer, zones, cabins, accessPoints, ...own } = settings;
    expect(parsed).toEqual(own);
  });

  test('outlives a change by somebody else, and names what both changed', () => {
    const typed = { ...before, homePort: 'Vis', lengthM: '42,5' };
    const newer = { ...before, homePort: 'Hvar', retentionDays: '30' };
    expect(follow(typed, before, newer)).toEqual({
      draft: { ...before, homePort: 'Vis', lengthM: '42,5', retentionDays: '30' },
      both: ['homePort'],
    });
    // The same change made twice is no conflict, and what nobody typed follows.
    expect(follow({ ...before, homePort: 'Hvar' }, before, newer).both).toEqual([]);
    expect(follow(before, before, newer)).toEqual({ draft: newer, both: [] });
  });

  test('takes the order of roles for no change', () => {
    const one = { ...before, secondFactorRoles: ['captain', 'eto'] as const };
    const other = { ...before, secondFactorRoles: ['eto', 'captain'] as const };
    expect(differing(one, other)).toEqual([]);
    expect(differing(one, before)).toEqual(['secondFactorRoles']);
  });

  test('reads a decimal comma, and names every field that is no number', () => {
    expect(vesselBody.parse(bodyOf({ ...before, lengthM: ' 42,5 ' }, settings)).lengthM).toBe(42.5);
    expect(vesselBody.parse(bodyOf({ ...before, lengthM: '', guestsMax: '' }, settings))).toMatchObject({
      lengthM: null,
      guestsMax: null,
    });
    const wrong = {
      ...before,
      lengthM: 'long',
      guestsMax: '1.5',
      retentionDays: '',
      kind: ' ',
      serialPrefix: 'M1',
    };
    const result = vesselBody.safeParse(bodyOf(wrong, settings));
    const sentences = result.error?.issues.map(({ path, message }) => [path.join('.'), message]);
    expect(Object.fromEntries(sentences ?? [])).toEqual({
      lengthM: 'Give the length in metres',
      guestsMax: 'Give a whole number',
      retentionDays: 'Give whole days',
      kind: 'Say what she is, such as motor yacht',
      serialPrefix: 'One to three capital letters',
    });
  });
});

describe('the list of cabins', () => {
  const rows = rowsOf([
    { id: 'a', deck: 'Lower deck', name: 'Port VIP' },
    { id: 'b', deck: 'Lower deck', name: 'Twin aft' },
    { id: 'c', deck: null, name: 'Tender' },
  ]);

  test('moves a line by one, and not past either end', () => {
    expect(moved(rows, 0, 1).map(({ id }) => id)).toEqual(['b', 'a', 'c']);
    expect(moved(rows, 2, -1).map(({ id }) => id)).toEqual(['a', 'c', 'b']);
    expect(moved(rows, 0, -1)).toEqual(rows);
    expect(moved(rows, 2, 1)).toEqual(rows);
  });

  test('keeps the ids of lines that have one, and sends none for new ones', () => {
    const { rows: after, key } = withNew(rows.slice(0, 2));
    expect(after.at(-1)).toEqual({ key, deck: 'Lower deck', name: '' });
    expect(placesOf(after)).toEqual([
      { id: 'a', deck: 'Lower deck', name: 'Port VIP' },
      { id: 'b', deck: 'Lower deck', name: 'Twin aft' },
      { deck: 'Lower deck', name: '' },
    ]);
  });

  test('is read deck by deck', () => {
    expect(byDeck(rows)).toEqual([
      { deck: 'Lower deck', names: ['Port VIP', 'Twin aft'] },
      { deck: '', names: ['Tender'] },
    ]);
  });
});

test('the table of who may do what holds every action once', () => {
  const shown = permissionGroups().flatMap(({ actions }) => actions);
  expect([...shown].sort()).toEqual(Object.keys(VESSEL_PERMISSIONS).sort());
  expect(permissionGroups().map(({ title }) => title)).not.toContain('More');
});

test('roles stand in the order of the table, and ETO stays in capitals', () => {
  expect(rolesInWords(['eto', 'purser', 'captain'])).toBe('Captain, purser, ETO');
  expect(rolesInWords(['owner_keeper', 'eto'])).toBe("ETO, trusted with the owner's network");
});

describe('zones', () => {
  const june = new Date('2026-06-14T09:00:00Z');
  const first = (search: string) => searchZones(search, june, 8).shown.map(({ name }) => name);

  test('are found by city, by country and by offset', () => {
    expect(first('zagreb')).toEqual(['Europe/Zagreb']);
    expect(first('Croatia')).toContain('Europe/Zagreb');
    expect(first('new york')[0]).toBe('America/New_York');
    expect(first('utc-3')).toContain('Etc/GMT+3');
    expect(searchZones('nowhere at all', june, 8)).toEqual({ shown: [], matching: 0 });
  });

  // IANA tz database, file etcetera: the sign of Etc/GMT names is the other way round.
  test('of fixed offsets say the offset they really have', () => {
    expect(zoneInWords('Etc/GMT+3', june)).toBe('UTC-3, no summer time');
    for (const { name, place } of allZones().filter(({ name }) => name.startsWith('Etc/'))) {
      const shown = new Intl.DateTimeFormat('en', { timeZone: name, timeZoneName: 'shortOffset' })
        .formatToParts(june)
        .find(({ type }) => type === 'timeZoneName')?.value;
      expect(place).toBe(`${shown?.replace('GMT', 'UTC')}, no summer time`);
    }
  });

  test('are all names a clock can be set to', () => {
    for (const { name } of allZones())
      expect(() => new Intl.DateTimeFormat('en', { timeZone: name })).not.toThrow();
    expect(allZones().length).toBeGreaterThan(400);
  });
});
