import { createHmac } from 'node:crypto';
import type { LogEntry, LogFilter, LogPage } from '../../shared/api/log.ts';
import { LOG_KINDS, type LogKind } from '../../shared/rules/logKinds.ts';
import { zoneAt } from '../../shared/rules/shipTime.ts';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import { sameText } from '../http/session.ts';
import type { Verb } from '../http/verb.ts';
import type { Services } from '../services.ts';
import { shipZones } from '../vessels/readVessel.ts';
import type { SubjectKind } from './appendLog.ts';

interface Row {
  id: string;
  seq: string;
  at: Date;
  kind: LogKind;
  network_id: string | null;
  ssid: string | null;
  subject_kind: SubjectKind | null;
  subject_id: string | null;
  subject: string | null;
  actor_id: string | null;
  actor: string | null;
  body: Record<string, unknown>;
}

/** Where a page ends: everything before it in (instant, number). */
export interface Place {
  readonly at: string;
  readonly seq: number;
}

/** A page of the log, newest first. */
export async function readLog(
  { services, tx, actor, now }: Verb,
  asked: LogFilter & { readonly after?: string; readonly limit: number },
): Promise<LogPage> {
  const vesselId = actor.vesselId ?? '';
  const before = asked.after ? readCursor(services, vesselId, asked.after) : null;
  const rows = await logEntries(services, tx, vesselId, { filter: asked, before, limit: asked.limit + 1 });
  const entries = rows.slice(0, asked.limit);
  const last = entries.at(-1);
  return {
    zone: zoneAt(await shipZones(services, tx, vesselId), now),
    entries,
    after:
      rows.length > asked.limit && last
        ? writeCursor(services, vesselId, { at: last.at, seq: last.seq })
        : null,
  };
}

/** Entries of one vessel that the filter lets through, newest first. */
export async function logEntries(
  services: Services,
  tx: Tx,
  vesselId: string,
  asked: { readonly filter: LogFilter; readonly before: Place | null; readonly limit: number },
): Promise<LogEntry[]> {
  const { filter, before } = asked;
  const conditions = ['e.vessel_id = $vessel'];
  const bind: Record<string, unknown> = { vessel: vesselId, limit: asked.limit };
  const narrow = (condition: string, given: Record<string, unknown>) => {
    conditions.push(condition);
    Object.assign(bind, given);
  };
  if (filter.networkId) narrow('e.network_id = $network', { network: filter.networkId });
  if (filter.kind) narrow('e.kind = $kind', { kind: filter.kind });
  if (filter.from) narrow('e.at >= $from', { from: new Date(filter.from) });
  if (filter.to) narrow('e.at < $to', { to: new Date(filter.to) });
  if (before) {
    narrow('(e.at, e.seq) < ($beforeAt::timestamptz, $beforeSeq::bigint)', {
      beforeAt: before.at,
      beforeSeq: before.seq,
    });
  }
  if (filter.person) {
    narrow(
      'e.id IN (SELECT n.entry_id FROM log_names n WHERE n.vessel_id = $vessel AND n.name ILIKE $person)',
      { person: `%${filter.person.replace(/[\\%_]/g, '\\$&')}%` },
    );
  }
  const rows = await services.db.rows<Row>(
    tx,
    `WITH page AS (SELECT * FROM log_entries e WHERE ${conditions.join(' AND ')} ORDER BY e.at DESC, e.seq DESC LIMIT $limit)
     SELECT e.id, e.seq, e.at, e.kind, e.network_id, w.ssid, e.subject_kind, e.subject_id, s.name AS subject, e.actor_id,
       a.name AS actor, e.body
     FROM page e LEFT JOIN networks w ON w.id = e.network_id
     LEFT JOIN log_names s ON s.entry_id = e.id AND s.role = 'subject'
     LEFT JOIN log_names a ON a.entry_id = e.id AND a.role = 'actor'
     ORDER BY e.at DESC, e.seq DESC`,
    bind,
  );
  return rows.map(present);
}

function present(row: Row): LogEntry {
  const facts: LogEntry['facts'] = {};
  for (const [name, value] of Object.entries(row.body)) {
    if (name.endsWith('Commitment')) continue;
    if (value === null || ['string', 'number', 'boolean'].includes(typeof value))
      facts[name] = value as string | number | boolean | null;
  }
  return {
    id: row.id,
    seq: Number(row.seq),
    at: row.at.toISOString(),
    kind: row.kind,
    words: LOG_KINDS[row.kind],
    network: row.network_id ? { id: row.network_id, ssid: row.ssid ?? '' } : null,
    subject:
      row.subject_kind && row.subject_id
        ? { kind: row.subject_kind, id: row.subject_id, name: row.subject }
        : null,
    actor: row.actor_id ? { id: row.actor_id, name: row.actor } : null,
    facts,
  };
}

// Bound to the vessel: a cursor of one log opens no other one.
const signature = (services: Services, vesselId: string, text: string): string =>
  createHmac('sha256', services.config.fingerprintKey)
    .update(`log cursor\0${vesselId}\0${text}`)
    .digest('base64url')
    .slice(0, 22);

function writeCursor(services: Services, vesselId: string, place: Place): string {
  const text = `${place.at}_${place.seq}`;
  return `${Buffer.from(text).toString('base64url')}.${signature(services, vesselId, text)}`;
}

function readCursor(services: Services, vesselId: string, cursor: string): Place {
  const [encoded = '', signed = '', ...more] = cursor.split('.');
  const text = Buffer.from(encoded, 'base64url').toString();
  const [at = '', seq = ''] = text.split('_');
  if (more.length > 0 || !sameText(signed, signature(services, vesselId, text))) {
    throw new AppError('malformed', 'This page of the log cannot be found. Start again at the newest.');
  }
  return { at, seq: Number(seq) };
}
