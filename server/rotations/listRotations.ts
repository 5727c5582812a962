import { createHmac } from 'node:crypto';
import type { RotationList } from '../../shared/api/rotations.ts';
import { UNDER_WAY } from '../../shared/rules/rotation.ts';
import { AppError } from '../errors.ts';
import { sameText } from '../http/session.ts';
import type { Verb } from '../http/verb.ts';
import type { Services } from '../services.ts';
import { presentSummary, SUMMARY, type SummaryRow } from './present.ts';

/** How far the calendar looks ahead, in milliseconds. */
const CALENDAR_MS = 42 * 86_400_000;

/** What is planned in the next six weeks or under way, and a page of what is over or in force. */
export async function listRotations(
  { services, tx, actor, now }: Verb,
  asked: { readonly networkId?: string; readonly after?: string; readonly limit: number },
): Promise<RotationList> {
  const bind = { vessel: actor.vesselId, network: asked.networkId ?? null };
  const calendar = asked.after
    ? []
    : await services.db.rows<SummaryRow>(
        tx,
        `${SUMMARY} WHERE r.vessel_id = $vessel AND ($network::uuid IS NULL OR r.network_id = $network::uuid)
           AND (r.state = ANY($underWay) OR (r.state IN ('planned','staged') AND r.due_at <= $until))
         ORDER BY r.due_at, r.id LIMIT 200`,
        { ...bind, underWay: [...UNDER_WAY], until: new Date(now.getTime() + CALENDAR_MS) },
      );
  const cursor = asked.after ? readCursor(services, actor.vesselId, asked.after) : null;
  const history = await services.db.rows<SummaryRow>(
    tx,
    `${SUMMARY} WHERE r.vessel_id = $vessel AND ($network::uuid IS NULL OR r.network_id = $network::uuid)
       AND r.state IN ('live','drifted','retired','cancelled','superseded')
       AND ($at::timestamptz IS NULL OR (r.created_at, r.id) < ($at::timestamptz, $id::uuid))
     ORDER BY r.created_at DESC, r.id DESC LIMIT $limit`,
    { ...bind, at: cursor?.at ?? null, id: cursor?.id ?? null, limit: asked.limit + 1 },
  );
  const page = history.slice(0, asked.limit);
  const last = page.at(-1);
  return {
    calendar: calendar.map(presentSummary),
    history: page.map(presentSummary),
    after: history.length > asked.limit && last ? writeCursor(services, actor.vesselId, last) : null,
  };
}

const signature = (services: Services, vesselId: string | null, text: string): string =>
  createHmac('sha256', services.config.fingerprintKey)
    .update(`rotations cursor\0${vesselId}\0${text}`)
    .digest('base64url')
    .slice(0, 22);

function writeCursor(services: Services, vesselId: string | null, row: SummaryRow): string {
  const text = `${row.created_at.toISOString()}_${row.id}`;
  return `${Buffer.from(text).toString('base64url')}.${signature(services, vesselId, text)}`;
}

function readCursor(services: Services, vesselId: string | null, cursor: string): { at: string; id: string } {
  const [encoded = '', signed = ''] = cursor.split('.');
  const text = Buffer.from(encoded, 'base64url').toString();
  const [at = '', id = ''] = text.split('_');
  if (!sameText(signed, signature(services, vesselId, text))) {
    throw new AppError('malformed', 'This page of the list cannot be found. Start again at the newest.');
  }
  return { at, id };
}
