import type { ChangeReason, PlanReason } from '../../../shared/api/rotations.ts';
import type { VoyageView } from '../../../shared/api/voyages.ts';
import type { Audience } from '../../../shared/rules/permissions.ts';
import { visibleText } from '../../lib/safeText.ts';
import { sameShipDay, shipClock, shipDate, shipMomentInWords } from '../../lib/shipTime.ts';

/** What the words depend on besides the reason itself. */
export interface ReasonContext {
  /** IANA name of the ship's zone. */
  readonly zone: string;
  readonly now: Date;
  /** When the change happens. */
  readonly dueAt: string;
  readonly audience: Audience;
  /** Whether the network has quiet hours. */
  readonly quiet: boolean;
  /** The calendar, for the name of the charter or trip a party leaves at the end of. */
  readonly voyages: readonly VoyageView[];
}

const DAY_MS = 86_400_000;
/** A party leaves within this time of its voyage's end. */
const SAME_END_MS = DAY_MS / 2;

const PERSON: Record<ChangeReason, string> = {
  routine: 'set by hand',
  leak: 'set by hand, because the passphrase leaked',
  departure: 'set by hand, because somebody who knows it has left',
  lost_card: 'set by hand, because a card was lost',
  dismissal: 'set by hand, because somebody was dismissed',
};

/** "11:00" on the day of the change, "Sat 20 June 10:00" on any other. */
function momentBeside(at: string, { dueAt, zone, now }: ReasonContext): string {
  return sameShipDay(at, dueAt, zone) ? shipClock(at, zone) : shipMomentInWords(at, zone, now);
}

function onDay(at: string, { zone, now }: ReasonContext): string {
  return sameShipDay(at, now, zone) ? 'today' : `on ${shipDate(at, zone, now)}`;
}

const VAGUE = new Set(['charter', "owner's trip"]);

/** The charter or trip that ends when a party leaves, by its title; null where the title says nothing. */
function voyageEndingAt(at: string, voyages: readonly VoyageView[]): string | null {
  const end = Date.parse(at);
  const near = voyages
    .filter(({ kind, title }) => kind === 'charter' || (kind === 'owner_trip' && title !== ''))
    .map((voyage) => ({ voyage, apart: Math.abs(Date.parse(voyage.endsAt) - end) }))
    .filter(({ apart }) => apart <= SAME_END_MS)
    .sort((one, other) => one.apart - other.apart)[0];
  if (!near || VAGUE.has(near.voyage.title.toLowerCase())) return null;
  return near.voyage.title;
}

/** Both counted in whole days, rounded: "4 days before the limit". */
function ageWords(reason: { days: number; reachedAt: string }, context: ReasonContext): string {
  const before = Math.round((Date.parse(reason.reachedAt) - Date.parse(context.dueAt)) / DAY_MS);
  const hour = context.quiet ? 'quiet hour, ' : '';
  const ashore = context.audience === 'owner' ? ', when the owner is ashore' : '';
  if (before < 0)
    return `${context.quiet ? 'the first quiet hour' : 'soon'} after its limit of ${reason.days} days${ashore}`;
  if (before === 0)
    return `${hour}just before its limit of ${reason.days} ${reason.days === 1 ? 'day' : 'days'}${ashore}`;
  return `${hour}${before} ${before === 1 ? 'day' : 'days'} before the limit${ashore}`;
}

/** Why a change happens when it does, as words that follow its date. */
export function reasonWords(reason: PlanReason, context: ReasonContext): string {
  switch (reason.code) {
    case 'age_limit':
      return ageWords(reason, context);
    case 'party_departure': {
      const title = voyageEndingAt(reason.at, context.voyages);
      const leaves = Date.parse(reason.at) <= context.now.getTime() ? 'left' : 'leaves';
      const which = title ? ` (${visibleText(title)})` : '';
      return `after the party ${leaves} at ${momentBeside(reason.at, context)}${which}`;
    }
    case 'departed_guest':
      return `a guest who knows it left ${onDay(reason.at, context)}`;
    case 'sign_off':
      return `somebody who knows it signed off ${onDay(reason.at, context)}`;
    case 'lost_card':
      return `a card was lost ${onDay(reason.at, context)}`;
    case 'leak':
      return `a leak was reported ${onDay(reason.at, context)}`;
    case 'owner_aboard':
      return `held while the owner is aboard, until ${momentBeside(reason.until, context)}`;
    case 'crossing':
      return `held while the crossing is on, until ${momentBeside(reason.until, context)}`;
    case 'overdue':
      return `late: it should have changed by ${momentBeside(reason.since, context)}`;
    case 'put_off':
      return `put off from ${momentBeside(reason.from, context)}`;
    case 'person':
      return PERSON[reason.why];
    case 'going_back':
      return `going back to the passphrase before, because change ${reason.ticket} was given up`;
  }
}

/** Whether the reason itself says that something is late. */
export const isLate = (reason: PlanReason): boolean => reason.code === 'overdue';

/** All reasons in one line: "quiet hour, 4 days before the limit; put off from Tue 16 June 10:30". */
export const reasonLine = (reasons: readonly PlanReason[], context: ReasonContext): string =>
  reasons.map((reason) => reasonWords(reason, context)).join('; ');
