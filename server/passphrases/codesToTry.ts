import { Temporal } from 'temporal-polyfill';
import type { Security } from '../../shared/api/common.ts';
import type { Revealed } from '../../shared/api/passphrases.ts';
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
  to_passphrase_id: string | null;
  handed_out_at: Date | null;
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
    'SELECT id, ssid, security, hidden FROM networks WHERE id = $network AND vessel_id = $vessel AND removed_at IS NULL',
    { network: networkId, vessel: vesselId },
  );
  if (!row) throw notFound();
  return row;
}

/**
 * Which passphrases may work now and in which order to try them (guard section 3.3): the one in force alone while
 * nothing is under way; both once a change has left for the boat, the new one first after its time; a staged one
 * last, only for those who prepare its cards. Never rounded to one while it is not known.
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
  const ticket = await db.row<TicketRow>(
    tx,
    `SELECT state, due_at, takes_over, from_passphrase_id, to_passphrase_id, handed_out_at FROM rotations
     WHERE network_id = $network AND vessel_id = $vessel AND (state = ANY($open::text[]) OR state = 'drifted')
     ORDER BY state = 'drifted' LIMIT 1`,
    { ...bind, open: [...OPEN_STATES] },
  );
  const zones = await shipZones(services, tx, given.vesselId);
  const inForce: ToShow[] = live
    ? [{ passphraseId: live.id, role: 'in_force', words: 'In force', since: live.live_at }]
    : [];
  if (!ticket?.to_passphrase_id) return inForce;
  if (ticket.state === 'staged' && !ticket.takes_over) {
    const from = `From ${inShipTime(ticket.due_at, zoneAt(zones, ticket.due_at))}, not before`;
    return [
      ...inForce,
      ...(given.withStaged
        ? [{ passphraseId: ticket.to_passphrase_id, role: 'staged' as const, words: from, since: null }]
        : []),
    ];
  }
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
    given.now,
  );
  return order.flatMap((which, index): ToShow[] => {
    const passphraseId = which === 'new' ? ticket.to_passphrase_id : ticket.from_passphrase_id;
    if (!passphraseId) return [];
    const name = which === 'new' ? 'the new one' : 'the old one';
    return [
      {
        passphraseId,
        role: which,
        words: index === 0 ? `Try this first: ${name}` : `If that does not work: ${name}`,
        since: null,
      },
    ];
  });
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
  return Temporal.Instant.fromEpochMilliseconds(at.getTime())
    .toZonedDateTimeISO(zone)
    .toLocaleString('en-GB', {
      weekday: 'short',
      day: 'numeric',
      month: 'long',
      hour: '2-digit',
      minute: '2-digit',
      hourCycle: 'h23',
    });
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
