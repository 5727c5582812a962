import type { VesselBody, VesselSettings } from '../../../shared/api/vessels.ts';
import type { VesselRole } from '../../../shared/rules/permissions.ts';

/** What is typed about a vessel, each field as its box holds it. */
export interface VesselDraft {
  name: string;
  kind: string;
  lengthM: string;
  guestsMax: string;
  homePort: string;
  ownerName: string;
  retentionDays: string;
  serialPrefix: string;
  secondFactorRoles: readonly VesselRole[];
}

export const FIELD_WORDS: Record<keyof VesselDraft, string> = {
  name: 'Name',
  kind: 'Kind',
  lengthM: 'Length',
  guestsMax: 'Guests',
  homePort: 'Home port',
  ownerName: "Owner's name",
  retentionDays: "Days guests' names are kept",
  serialPrefix: "Letters of the cards' serials",
  secondFactorRoles: 'Second factor',
};

export const draftOf = (settings: VesselSettings): VesselDraft => ({
  name: settings.name,
  kind: settings.kind,
  lengthM: settings.lengthM === null ? '' : String(settings.lengthM),
  guestsMax: settings.guestsMax === null ? '' : String(settings.guestsMax),
  homePort: settings.homePort ?? '',
  ownerName: settings.ownerName ?? '',
  retentionDays: String(settings.retentionDays),
  serialPrefix: settings.serialPrefix,
  secondFactorRoles: settings.secondFactorRoles,
});

const same = (a: VesselDraft, b: VesselDraft, key: keyof VesselDraft) =>
  key === 'secondFactorRoles' ? [...a[key]].sort().join() === [...b[key]].sort().join() : a[key] === b[key];

const KEYS = Object.keys(FIELD_WORDS) as (keyof VesselDraft)[];

/** The fields in which two drafts differ. */
export const differing = (a: VesselDraft, b: VesselDraft): (keyof VesselDraft)[] =>
  KEYS.filter((key) => !same(a, b, key));

/**
 * Brings newer settings under what is being typed: fields left alone follow the newer ones, typed ones stay.
 * `both` are those that were typed here and changed by somebody else as well, to something different.
 */
export function follow(
  typed: VesselDraft,
  before: VesselDraft,
  newer: VesselDraft,
): { draft: VesselDraft; both: (keyof VesselDraft)[] } {
  const touched = differing(typed, before);
  const changed = differing(before, newer);
  const draft = { ...newer, ...Object.fromEntries(touched.map((key) => [key, typed[key]])) };
  return { draft, both: touched.filter((key) => changed.includes(key) && !same(typed, newer, key)) };
}

/** The number of a box: a comma counts as a decimal point; empty is null, and what is no number stays so (NaN). */
const numberOf = (text: string): number | null =>
  text.trim() === '' ? null : Number(text.trim().replace(',', '.'));

/** What is sent; where she lies and what feeds her have a form of their own and go along unchanged. */
export const bodyOf = (draft: VesselDraft, settings: VesselSettings): VesselBody => ({
  ...draft,
  lengthM: numberOf(draft.lengthM),
  guestsMax: numberOf(draft.guestsMax),
  retentionDays: numberOf(draft.retentionDays) ?? Number.NaN,
  serialPrefix: draft.serialPrefix.trim().toUpperCase(),
  secondFactorRoles: [...draft.secondFactorRoles],
  lying: settings.lying,
  source: settings.source,
  updatedAt: settings.updatedAt,
});
