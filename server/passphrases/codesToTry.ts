import { Temporal } from 'temporal-polyfill';
import type { Security } from '../../shared/api/common.ts';
import type { Revealed } from '../../shared/api/passphrases.ts';
import type { Audience } from '../../shared/rules/permissions.ts';
import { OPEN_STATES, type Rotation, toTry } from '../../shared/rules/rotation.ts';
import { zoneAt } from '../../shared/rules/shipTime.ts';
import { wifiPayload } from '../../shared/rules/wifi.ts';
import type { Tx } from '../db/connection.ts';
import { AppError, notFound } from '../errors.ts';
import type { Services } from '../services.ts';
import { shipZones } from '../vessels/readVessel.ts';
import { openPassphrase } from './sealPassphrase.ts';

export interface NetworkFacts {
  readonly id: string;
  readonly ssid: string;
  readonly audience: Audience;
  readonly security: Security;
  readonly hidden: boolean;
}

/** A passphrase that may be shown, before it is opened. */
export interface ToShow {
  readonly passphraseId: string;
  readonly role: Revealed['codes'][number]['role'];
  readonly words: string;
  readonly since: Date | null;
}

interface TicketRow {
  state: Rotation['state'];
  due_at: Date;
  takes_over: boolean;
  from_passphrase_id: string | null;
  to_passphrase_id: string;
  handed_out_at: Date | null;
  verified: number;
  of: number;
}

/** The network's facts. Throws `not_found` for another vessel's or a removed one. */
export async function networkFacts(
  services: Services,
  tx: Tx,
  vesselId: string,
  networkId: string,
): Promise<NetworkFacts> {
  const row = await services.db.row<NetworkFacts>(
    tx,
    'SELECT id, ssid, audience, security, hidden FROM networks WHERE id = $network AND vessel_id = $vessel AND removed_at IS NULL',
    { network: networkId, vessel: vesselId },
  );
  if (!row) throw notFound();
  return row;
}

/**
 * Which passphrases may work now and in which order to try them: the one in force alone while
 * nothing is under way; both once a change has left for the boat, the new one first after its time; a staged one
 * last, only for those who prepare its cards; and the one before where an access point was seen to have moved away
 * from the one in force. Never rounded to one while it is not known.
 */
export async function passphrasesToTry(
  services: Services,
  tx: Tx,
  given: { vesselId: string; networkId: string; withStaged: boolean; now: Date },
): Promise<ToShow[]> {
  const { db } = services;
  const bind = { network: given.networkId, vessel: given.vesselId };
  const live = await db.row<{ id: string; live_at: Date }>(
    tx,
    'SELECT id, live_at FROM passphrases WHERE network_id = $network AND vessel_id = $vessel AND live_at IS NOT NULL AND retired_at IS NULL',
    bind,
  );
  const tickets = await db.rows<TicketRow>(
    tx,
    `SELECT r.state, r.due_at, r.takes_over, r.from_passphrase_id, r.to_passphrase_id, r.handed_out_at,
       t.verified::int AS verified, t."of"::int AS "of"
     FROM rotations r CROSS JOIN LATERAL (SELECT count(*) AS "of", count(*) FILTER (WHERE seen = 'new' AND evidence IN ('E1','E2')) AS verified
       FROM rotation_targets WHERE rotation_id = r.id) t
     WHERE r.network_id = $network AND r.vessel_id = $vessel AND r.to_passphrase_id IS NOT NULL
       AND (r.state = ANY($open::text[]) OR r.state IN ('live','drifted'))`,
    { ...bind, open: [...OPEN_STATES] },
  );
  const settled = tickets.find(({ state }) => state === 'live' || state === 'drifted');
  const open = tickets.find((ticket) => ticket !== settled);
  const zones = await shipZones(services, tx, given.vesselId);
  const shown = open && hasLeft(open) ? bothOf(open, given.now) : inForce(live, settled);
  if (open && !hasLeft(open) && given.withStaged) {
    const from = `From ${inShipTime(open.due_at, zoneAt(zones, open.due_at))}, not before`;
    shown.push({ passphraseId: open.to_passphrase_id, role: 'staged', words: from });
  }
  const before = settled?.state === 'drifted' ? settled.from_passphrase_id : null;
  if (before !== null && !shown.some(({ passphraseId }) => passphraseId === before)) {
    shown.push({
      passphraseId: before,
      role: 'old',
      words: 'If that does not work: the one before. An access point was seen to run something else',
    });
  }
  const kept = await stillKept(services, tx, shown);
  return kept.map((one) => ({ ...one, since: one.passphraseId === live?.id ? live.live_at : null }));
}

type Candidate = Omit<ToShow, 'since'>;

/** Once a change has left for the boat, an access point may run either passphrase. */
const hasLeft = ({ state, takes_over, handed_out_at }: TicketRow): boolean =>
  takes_over || (state !== 'staged' && (state !== 'needs_somebody' || handed_out_at !== null));

function inForce(live: { id: string } | null, settled: TicketRow | undefined): Candidate[] {
  if (!live) return [];
  const words = settled
    ? `In force, confirmed on ${settled.verified} of ${settled.of} access points`
    : 'In force';
  return [{ passphraseId: live.id, role: 'in_force', words }];
}

function bothOf(ticket: TicketRow, now: Date): Candidate[] {
  const order = toTry(
    {
      ...EMPTY,
      state: ticket.state,
      dueAt: ticket.due_at,
      takesOver: ticket.takes_over,
      from: ticket.from_passphrase_id,
      to: ticket.to_passphrase_id,
      handedOutAt: ticket.handed_out_at,
    },
    now,
  );
  const names = ticket.takes_over
    ? { new: 'the one before, which is being put back', old: 'the one that was given up' }
    : { new: 'the new one', old: 'the old one' };
  const known = `${ticket.verified} of ${ticket.of} access points are confirmed on the new one`;
  return order.flatMap((role, index): Candidate[] => {
    const passphraseId = role === 'new' ? ticket.to_passphrase_id : ticket.from_passphrase_id;
    if (!passphraseId) return [];
    const unknown = ticket.state === 'unknown' ? 'We do not know yet. ' : '';
    const words =
      index === 0
        ? `${unknown}Try this first: ${names[role]}. ${ticket.takes_over ? 'Each access point is being confirmed' : known}`
        : `If that does not work: ${names[role]}`;
    return [{ passphraseId, role, words }];
  });
}

/** Without those whose secret was forgotten after they were proven refused everywhere. */
async function stillKept(
  services: Services,
  tx: Tx,
  shown: readonly Candidate[],
): Promise<readonly Candidate[]> {
  const kept = await services.db.rows<{ passphrase_id: string }>(
    tx,
    'SELECT passphrase_id FROM passphrase_secrets WHERE passphrase_id = ANY($ids::uuid[]) AND sealed IS NOT NULL',
    { ids: shown.map(({ passphraseId }) => passphraseId) },
  );
  const ids = new Set(kept.map(({ passphrase_id }) => passphrase_id));
  return shown.filter(({ passphraseId }) => ids.has(passphraseId));
}

const EMPTY: Omit<Rotation, 'state' | 'dueAt' | 'takesOver' | 'from' | 'to' | 'handedOutAt'> = {
  mode: 'graceful',
  driver: 'by_hand',
  ticket: null,
  reportBy: null,
  targets: [],
  ways: [],
  waivedBy: null,
  detail: null,
};

/** "Sun 14 June 03:00" in the zone given. */
function inShipTime(at: Date, zone: string): string {
  const time = Temporal.Instant.fromEpochMilliseconds(at.getTime()).toZonedDateTimeISO(zone);
  const part = (options: Intl.DateTimeFormatOptions) => time.toPlainDate().toLocaleString('en-GB', options);
  const clock = time.toPlainTime().toString({ smallestUnit: 'minute' });
  return `${part({ weekday: 'short' })} ${time.day} ${part({ month: 'long' })} ${clock}`;
}

/** Opens what is to be shown, as words and as the standard payload. The caller has written the log first. */
export async function openCodes(
  services: Services,
  tx: Tx,
  network: NetworkFacts,
  shown: readonly ToShow[],
): Promise<Revealed> {
  if (shown.length === 0) {
    throw new AppError(
      'not_now',
      'No passphrase is on record for this network yet. Type in the one in force, or let Quayword make one.',
    );
  }
  const codes: Revealed['codes'] = [];
  for (const one of shown) {
    const passphrase = await openPassphrase(services, tx, one.passphraseId);
    codes.push({
      passphraseId: one.passphraseId,
      role: one.role,
      words: one.words,
      passphrase,
      payload: wifiPayload({
        ssid: network.ssid,
        passphrase,
        security: network.security,
        hidden: network.hidden,
      }),
      since: one.since?.toISOString() ?? null,
    });
  }
  return { ssid: network.ssid, security: network.security, hidden: network.hidden, codes };
}
