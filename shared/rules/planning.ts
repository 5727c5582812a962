import type { PlanReason } from '../api/rotations.ts';
import type { Audience } from './permissions.ts';
import {
  FIVE_MINUTES_MS,
  freeFrom,
  lastQuiet,
  nextQuiet,
  occurrenceOf,
  type QuietHours,
  roundUp,
  type Span,
} from './quietHours.ts';
import type { ZoneSpan } from './shipTime.ts';

/** What moves a change up. */
export interface Exposure {
  readonly kind: 'departed_guest' | 'sign_off' | 'lost_card' | 'leak';
  readonly at: Date;
}

export interface PlanInput {
  readonly network: { readonly audience: Audience; readonly carriesEquipment: boolean };
  readonly policy: {
    readonly ageLimitDays: number;
    readonly quietHours: readonly QuietHours[];
    readonly onPartyDeparture: boolean;
    readonly onSignOff: boolean;
    readonly onLostCard: boolean;
    readonly onLeak: boolean;
  };
  /** When the passphrase in force came into force. */
  readonly liveAt: Date;
  readonly zones: readonly ZoneSpan[];
  readonly voyages: readonly { readonly kind: string; readonly startsAt: Date; readonly endsAt: Date }[];
  readonly parties: readonly {
    readonly arrivesAt: Date;
    readonly leavesAt: Date;
    readonly ashoreAt: Date | null;
  }[];
  /** What exposes the passphrase in force. */
  readonly exposures: readonly Exposure[];
  /** Occurrences that were used or cancelled before. */
  readonly used: ReadonlySet<string>;
  /** When the change that was cancelled last would have happened; the next one comes after it. */
  readonly putOffFrom?: Date | null;
  readonly now: Date;
}

export interface Plan {
  readonly dueAt: Date;
  /** The age limit, or an exposure's own limit where that comes first. */
  readonly deadlineAt: Date;
  /** The one that set the time comes first. */
  readonly reasons: readonly PlanReason[];
  readonly occurrence: string;
}

/** Cabins are cleared and cards collected in this time after a party leaves. Common practice, no source. */
export const SETTLING_MS = 3_600_000;
/** An exposure is answered within this time. Common practice, no source. */
export const EXPOSURE_LIMIT_MS = 48 * 3_600_000;
/** A cancelled change is put off at least this long, so that it is not back the same night. Common practice, no source. */
export const PUT_OFF_MS = 12 * 3_600_000;
/** The crew's network stays as it is around an arrival. Common practice, no source. */
const ARRIVAL_MS = 2 * 3_600_000;
const DAY_MS = 86_400_000;

interface Candidate {
  readonly at: Date;
  readonly occurrence: string;
  readonly reason: PlanReason;
}

/**
 * When a network's passphrase changes next, and why. Guest: an hour after the party leaves, before the next
 * arrives, and not while another party is aboard. Crew: the next quiet hour after a sign-off, not around an arrival. Owner: not during an owner's
 * trip. A network with equipment: not during a crossing. All of them before the age limit, in its last quiet
 * hour; where that cannot be, the first one after, with the delay among the reasons. Common practice, no
 * source; local times by RFC 5545 section 3.3.5.
 */
export function planNext(input: PlanInput): Plan {
  const { policy, now } = input;
  const ageReachedAt = new Date(input.liveAt.getTime() + policy.ageLimitDays * DAY_MS);
  const exposure = firstExposure(input);
  const deadlineAt = exposure
    ? earlier(ageReachedAt, new Date(exposure.at.getTime() + EXPOSURE_LIMIT_MS))
    : ageReachedAt;
  const putOffFrom = input.putOffFrom ?? null;
  const floor = putOffFrom ? later(now, new Date(putOffFrom.getTime() + PUT_OFF_MS)) : now;
  const blocked = blockedSpans(input);

  const departure = afterDeparture(input, blocked, floor);
  const candidates = [
    exposure ? afterExposure(input, exposure, blocked, floor) : null,
    departure,
    // A departure within the limit answers the limit too, at the better moment.
    departure && departure.at.getTime() <= ageReachedAt.getTime()
      ? null
      : beforeAgeLimit(input, ageReachedAt, blocked, floor),
  ].filter((candidate) => candidate !== null);
  const chosen = candidates.reduce((best, next) => (next.at.getTime() < best.at.getTime() ? next : best));
  return {
    dueAt: chosen.at,
    deadlineAt,
    reasons: [chosen.reason, ...delays(input, chosen.at, deadlineAt, putOffFrom)],
    occurrence: chosen.occurrence,
  };
}

const earlier = (one: Date, other: Date): Date => (one.getTime() <= other.getTime() ? one : other);
const later = (one: Date, other: Date): Date => (one.getTime() >= other.getTime() ? one : other);

/** Whether the policy moves a change up for this kind of exposure. */
function movesUp(policy: PlanInput['policy'], kind: Exposure['kind']): boolean {
  switch (kind) {
    case 'departed_guest':
      return policy.onPartyDeparture;
    case 'sign_off':
      return policy.onSignOff;
    case 'lost_card':
      return policy.onLostCard;
    case 'leak':
      return policy.onLeak;
  }
}

/** Whether something that the policy answers exposed the passphrase in force at or after an instant. */
export function exposedSince({ exposures, policy }: PlanInput, since: Date): boolean {
  return exposures.some(({ kind, at }) => movesUp(policy, kind) && at.getTime() >= since.getTime());
}

function firstExposure({ exposures, policy }: PlanInput): Exposure | null {
  return (
    exposures
      .filter((exposure) => movesUp(policy, exposure.kind))
      .sort((one, other) => one.at.getTime() - other.at.getTime())[0] ?? null
  );
}

/** When this network may not be changed at all. */
function blockedSpans({ network, voyages, parties }: PlanInput): Span[] {
  const during = (kind: string) =>
    voyages
      .filter((voyage) => voyage.kind === kind)
      .map(({ startsAt, endsAt }) => ({ from: startsAt, until: endsAt }));
  return [
    ...(network.audience === 'owner' ? during('owner_trip') : []),
    ...(network.carriesEquipment ? during('crossing') : []),
    ...(network.audience === 'crew'
      ? parties.map(({ arrivesAt }) => ({
          from: new Date(arrivesAt.getTime() - ARRIVAL_MS),
          until: new Date(arrivesAt.getTime() + ARRIVAL_MS),
        }))
      : []),
  ];
}

const leftAt = (party: PlanInput['parties'][number]): Date => party.ashoreAt ?? party.leavesAt;

/** An hour after a party has left; sooner when the next one comes sooner, but never before the first has gone. */
function settled(input: PlanInput, left: Date): Date {
  const wanted = new Date(left.getTime() + SETTLING_MS);
  const next = input.parties
    .map((party) => party.arrivesAt)
    .filter((arrivesAt) => arrivesAt.getTime() >= left.getTime())
    .sort((one, other) => one.getTime() - other.getTime())[0];
  if (!next || next.getTime() > wanted.getTime()) return wanted;
  return new Date((left.getTime() + next.getTime()) / 2);
}

function afterExposure(
  input: PlanInput,
  exposure: Exposure,
  blocked: readonly Span[],
  floor: Date,
): Candidate {
  const reason: PlanReason = { code: exposure.kind, at: exposure.at.toISOString() };
  if (input.network.audience === 'guest' && input.parties.length > 0) {
    const aboard = input.parties.some(
      (party) => party.arrivesAt.getTime() <= floor.getTime() && floor.getTime() < leftAt(party).getTime(),
    );
    if (!aboard) {
      const lastLeft = input.parties
        .map(leftAt)
        .filter((left) => left.getTime() <= floor.getTime())
        .reduce<Date | null>((last, left) => (last === null ? left : later(last, left)), null);
      let at = roundUp(freeFrom(blocked, lastLeft ? later(floor, settled(input, lastLeft)) : floor));
      while (input.used.has(occurrenceOf('departure', at, input.zones)))
        at = new Date(at.getTime() + FIVE_MINUTES_MS);
      return { at, occurrence: occurrenceOf('departure', at, input.zones), reason };
    }
  }
  const rule = 'exposure';
  const moment = nextQuiet({ ...quiet(input), blocked, rule }, floor);
  return { ...moment, reason };
}

/** Whether a party that had come before this departure is still aboard once it has settled: its own departure counts. */
const othersStay = ({ parties }: PlanInput, left: Date, at: Date): boolean =>
  parties.some(
    (party) => party.arrivesAt.getTime() < left.getTime() && leftAt(party).getTime() > at.getTime(),
  );

function afterDeparture(input: PlanInput, blocked: readonly Span[], floor: Date): Candidate | null {
  if (!input.policy.onPartyDeparture || input.network.audience !== 'guest') return null;
  const departures = input.parties
    .map(leftAt)
    .filter((left) => !othersStay(input, left, settled(input, left)))
    .map((left) => ({ left, at: freeFrom(blocked, settled(input, left)) }))
    .filter(({ left, at }) => left.getTime() > input.liveAt.getTime() && at.getTime() >= floor.getTime())
    .map(({ left, at }) => ({
      at,
      occurrence: occurrenceOf('departure', at, input.zones),
      reason: { code: 'party_departure' as const, at: left.toISOString() },
    }))
    .filter(({ occurrence }) => !input.used.has(occurrence))
    .sort((one, other) => one.at.getTime() - other.at.getTime());
  return departures[0] ?? null;
}

function beforeAgeLimit(input: PlanInput, reachedAt: Date, blocked: readonly Span[], floor: Date): Candidate {
  const asked = { ...quiet(input), blocked, rule: 'age' };
  const moment =
    (reachedAt.getTime() > floor.getTime() ? lastQuiet(asked, reachedAt, floor) : null) ??
    nextQuiet(asked, floor);
  return {
    ...moment,
    reason: { code: 'age_limit', days: input.policy.ageLimitDays, reachedAt: reachedAt.toISOString() },
  };
}

const quiet = ({ policy, zones, used }: PlanInput) => ({ quietHours: policy.quietHours, zones, used });

/** Why it is later than it should be, or than it was. */
function delays(input: PlanInput, dueAt: Date, deadlineAt: Date, putOffFrom: Date | null): PlanReason[] {
  const reasons: PlanReason[] = [];
  if (dueAt.getTime() > deadlineAt.getTime()) {
    reasons.push({ code: 'overdue', since: deadlineAt.toISOString() });
    const holding = (kind: string) =>
      input.voyages.find(
        (voyage) =>
          voyage.kind === kind &&
          voyage.startsAt.getTime() <= deadlineAt.getTime() + DAY_MS &&
          voyage.endsAt.getTime() > later(deadlineAt, input.now).getTime() &&
          voyage.endsAt.getTime() <= dueAt.getTime(),
      );
    const trip = input.network.audience === 'owner' ? holding('owner_trip') : undefined;
    if (trip) reasons.push({ code: 'owner_aboard', until: trip.endsAt.toISOString() });
    const crossing = input.network.carriesEquipment ? holding('crossing') : undefined;
    if (crossing) reasons.push({ code: 'crossing', until: crossing.endsAt.toISOString() });
  }
  if (putOffFrom) reasons.push({ code: 'put_off', from: putOffFrom.toISOString() });
  return reasons;
}
