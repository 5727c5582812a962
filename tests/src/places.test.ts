import { describe, expect, test } from 'vitest';
import type { SessionView } from '../../shared/api/session.ts';
import type { VesselRole } from '../../shared/rules/permissions.ts';
import { firstPlace, vesselPlaces } from '../../src/app/places.ts';

const labels = (...roles: VesselRole[]) => vesselPlaces('v1', roles).map((place) => place.label);

function session(memberships: { vesselId: string; roles: VesselRole[] }[], dealer = false): SessionView {
  return {
    person: { id: 'p', name: 'Maud', email: 'maud@example.com', locale: 'en' },
    csrf: 'token',
    memberships: memberships.map((one) => ({ ...one, vesselName: one.vesselId })),
    dealer: dealer ? { id: 'd', name: 'Halden & Roe', role: 'service_desk' } : null,
    secondFactor: { enrolled: false, required: false },
    provedAt: '2026-06-14T12:00:00Z',
  };
}

describe('the navigation', () => {
  test('follows the table of permissions', () => {
    expect(labels('purser')).toEqual(['Arrivals', 'Networks', 'Cards', 'Log', 'Settings', 'Crew Wi-Fi']);
    expect(labels('captain')).toEqual(['Arrivals', 'Networks', 'Crew', 'Cards', 'Log', 'Settings']);
    expect(labels('eto')).toEqual(['Networks', 'Settings', 'Crew Wi-Fi']);
    expect(labels('crew')).toEqual(['Crew Wi-Fi']);
  });

  test('adds up where one person has several roles', () => {
    expect(labels('eto', 'purser')).toEqual([
      'Arrivals',
      'Networks',
      'Cards',
      'Log',
      'Settings',
      'Crew Wi-Fi',
    ]);
    expect(labels('crew', 'captain')).toEqual(labels('captain'));
  });
});

describe('the first page', () => {
  test('is the fleet for a dealer, the first allowed page aboard otherwise', () => {
    expect(firstPlace(session([{ vesselId: 'v1', roles: ['captain'] }], true))).toBe('/fleet');
    expect(firstPlace(session([{ vesselId: 'v1', roles: ['purser'] }]))).toBe('/vessels/v1/arrivals');
    expect(firstPlace(session([{ vesselId: 'v1', roles: ['eto'] }]))).toBe('/vessels/v1/networks');
    expect(firstPlace(session([{ vesselId: 'v1', roles: ['crew'] }]))).toBe('/vessels/v1/crew');
  });

  test('is the account for somebody without a role that opens a page', () => {
    expect(firstPlace(session([]))).toBe('/account');
    expect(firstPlace(session([{ vesselId: 'v1', roles: ['owner_keeper'] }]))).toBe('/account');
  });
});
