import type { RotationState } from '../api/common.ts';

/**
 * One replacement of one network's passphrase, as the rules see it. The rules hold for whoever carries it
 * out: a person with the entry sheet, the rehearsal, later the relay. Source: the project's own state machine;
 * its invariants are that every passphrase on an access point is kept, that what the screens list covers what
 * every access point runs, that "in force" means verified everywhere, that an older ticket never comes back,
 * and that a network has one open ticket at most.
 */
export interface Rotation {
  readonly state: RotationState;
  readonly mode: 'graceful' | 'urgent';
  readonly driver: 'by_hand' | 'rehearsal';
  readonly ticket: Ticket | null;
  /** Passphrase in force before; null for a network's first. */
  readonly from: string | null;
  /** The new passphrase; null until staged, and the same for ever after. */
  readonly to: string | null;
  readonly dueAt: Date;
  /** Took over from a change that was handed out, so access points may run either passphrase from its start. */
  readonly takesOver: boolean;
  /** When the first octet of it may have left the server; null before. */
  readonly handedOutAt: Date | null;
  readonly reportBy: Date | null;
  readonly targets: readonly Target[];
  readonly ways: readonly Way[];
  /** Who answered for not waiting for two ways aboard. */
  readonly waivedBy: string | null;
  /** What somebody has to do, as a sentence. */
  readonly detail: string | null;
}

/** A rotation's numbered order to the boat. Numbers only grow; the epoch grows on a restore. */
export interface Ticket {
  readonly epoch: number;
  readonly number: number;
}

export type Seen = 'new' | 'old' | 'other' | 'unreachable';
/** E0 sent, E1 read back, E2 a real association or a person's typed-back passphrase. */
export type Evidence = 'E0' | 'E1' | 'E2';
export type Way = 'journal' | 'card' | 'officer' | 'kiosk';

/** One access point of the list that was frozen with the ticket, and what was last seen on it. */
export interface Target {
  readonly accessPointId: string;
  readonly seen: Seen | null;
  readonly evidence: Evidence | null;
}

/** Everything that can happen to a rotation. */
export type Action =
  | {
      readonly kind: 'stage';
      readonly ticket: Ticket;
      readonly to: string;
      readonly targets: readonly string[];
    }
  | { readonly kind: 'move'; readonly dueAt: Date }
  | { readonly kind: 'cancel' }
  | { readonly kind: 'disclose'; readonly way: Way }
  | { readonly kind: 'waive'; readonly by: string }
  | { readonly kind: 'handOut'; readonly reportBy: Date; readonly crossing: boolean }
  | { readonly kind: 'begin' }
  | ({ readonly kind: 'observe'; readonly ticket: Ticket } & Observation)
  | { readonly kind: 'reportMissing' }
  | { readonly kind: 'needSomebody'; readonly why: string }
  | { readonly kind: 'supersede'; readonly by: Ticket | null }
  | { readonly kind: 'retire' }
  | { readonly kind: 'drift'; readonly accessPointId: string; readonly seen: 'old' | 'other' | 'unreachable' }
  | { readonly kind: 'acceptDrift'; readonly accessPointId: string; readonly evidence: Evidence }
  | { readonly kind: 'restore' };

export interface Observation {
  readonly accessPointId: string;
  readonly seen: Seen;
  readonly evidence: Evidence;
}

/** `through` lists the states entered, in order; empty when only facts within the state changed. */
export type Outcome =
  | { readonly ok: true; readonly next: Rotation; readonly through: readonly RotationState[] }
  | { readonly ok: false; readonly code: 'not_now' | 'stale' | 'conflict'; readonly sentence: string };

/** The only steps there are; the database holds the same list and refuses the others too. */
export const ROTATION_STEPS: Readonly<Record<RotationState, readonly RotationState[]>> = {
  planned: ['staged', 'cancelled'],
  staged: ['handed_out', 'cancelled', 'needs_somebody'],
  handed_out: ['applying', 'unknown', 'needs_somebody', 'superseded', 'reconciling'],
  applying: ['live', 'unknown', 'needs_somebody', 'superseded', 'reconciling'],
  unknown: ['handed_out', 'applying', 'live', 'needs_somebody', 'superseded', 'reconciling'],
  needs_somebody: ['handed_out', 'applying', 'live', 'unknown', 'superseded', 'reconciling'],
  live: ['drifted', 'retired', 'reconciling'],
  drifted: ['live', 'retired', 'reconciling'],
  reconciling: ['handed_out', 'live', 'superseded', 'retired'],
  retired: [],
  cancelled: [],
  superseded: [],
};

/** States in which a network's one ticket is open. */
export const OPEN_STATES = [
  'planned',
  'staged',
  'handed_out',
  'applying',
  'unknown',
  'needs_somebody',
  'reconciling',
] as const satisfies readonly RotationState[];

/** States in which an access point may be running either passphrase. */
export const UNDER_WAY = [
  'handed_out',
  'applying',
  'unknown',
  'needs_somebody',
  'reconciling',
] as const satisfies readonly RotationState[];

export const isUnderWay = (state: RotationState): boolean =>
  (UNDER_WAY as readonly RotationState[]).includes(state);

/** True when an access point was seen on the new passphrase and not merely sent it (at least E1). */
export const isVerified = (target: Target): boolean =>
  target.seen === 'new' && (target.evidence === 'E1' || target.evidence === 'E2');

export const verifiedEverywhere = (targets: readonly Target[]): boolean =>
  targets.length > 0 && targets.every(isVerified);

/**
 * Whether two independent ways aboard to learn the new passphrase are confirmed, the network being changed
 * never counting as one. For a program aboard that is its journal and one of a card, an officer or a kiosk.
 * Entered by hand, the open sheet is both: what the journal is for the program, the sheet is for the person
 * at the access point, and the passphrase cannot get into one without a person aboard who has it. Each
 * access point then proves it again, typed back without seeing.
 */
export function isDisclosed(rotation: Pick<Rotation, 'driver' | 'ways'>): boolean {
  const has = (way: Way) => rotation.ways.includes(way);
  if (rotation.driver === 'by_hand') return has('officer');
  return has('journal') && (has('card') || has('officer') || has('kiosk'));
}

/** Which passphrases may work just now, in the order to try them: never rounded to one while either may run. */
export function toTry(rotation: Rotation, now: Date): readonly ('new' | 'old')[] {
  const old: readonly 'old'[] = rotation.from === null ? [] : ['old'];
  switch (rotation.state) {
    case 'staged':
      return rotation.takesOver ? ['new', ...old] : old;
    case 'needs_somebody':
      // Somebody is waited for who never opened the sheet: nothing has left yet.
      return rotation.handedOutAt === null && !rotation.takesOver ? old : ['new', ...old];
    case 'planned':
    case 'cancelled':
      return old;
    case 'live':
      return ['new'];
    case 'drifted':
      return ['new', ...old];
    case 'retired':
      return [];
    case 'superseded':
      return old;
    case 'handed_out':
      return now.getTime() < rotation.dueAt.getTime() ? [...old, 'new'] : ['new', ...old];
    default:
      return ['new', ...old];
  }
}

/** How long a retired passphrase is kept before its secret is forgotten, in milliseconds. Common practice, no source. */
export const PURGE_AFTER_MS = 7 * 86_400_000;

/**
 * Whether a retired passphrase may be forgotten: its time is up, and the one in force is proven on every
 * access point, so that no access point can still be running the old one.
 */
export function mayPurge(retiredAt: Date, inForce: Rotation | null, openUses: boolean, now: Date): boolean {
  return (
    now.getTime() - retiredAt.getTime() >= PURGE_AFTER_MS &&
    !openUses &&
    inForce !== null &&
    inForce.state === 'live' &&
    verifiedEverywhere(inForce.targets)
  );
}

/** The ticket that goes back to the passphrase before: higher, with both passphrases changing places. */
export function goingBack(
  rotation: Rotation,
  ticket: Ticket,
  accessPointIds: readonly string[],
  now: Date,
): Rotation {
  return {
    ...rotation,
    state: 'staged',
    ticket,
    from: rotation.to,
    to: rotation.from,
    dueAt: now,
    takesOver: true,
    handedOutAt: null,
    reportBy: null,
    targets: accessPointIds.map((accessPointId) => ({ accessPointId, seen: null, evidence: null })),
    // Whoever could learn the passphrase in force until now still can; the sheet has to be opened again.
    ways: [],
    waivedBy: null,
    detail: null,
  };
}
