import type { z } from 'zod';
import type { RotationState } from '../../shared/api/common.ts';
import type {
  accessPointOutcome,
  PlanReason,
  RotationSummary,
  RotationView,
} from '../../shared/api/rotations.ts';
import { type Audience, may, planAction } from '../../shared/rules/permissions.ts';
import { isUnderWay, type Rotation, toTry } from '../../shared/rules/rotation.ts';
import { rotationSentence } from '../../shared/rules/rotationWords.ts';
import type { Tx } from '../db/connection.ts';
import { notFound } from '../errors.ts';
import type { Actor } from '../http/session.ts';
import type { Services } from '../services.ts';

export interface SummaryRow {
  id: string;
  network_id: string;
  ssid: string;
  audience: Audience;
  state: RotationState;
  mode: 'graceful' | 'urgent';
  driver: 'by_hand' | 'rehearsal';
  planned_by: 'plan' | 'person';
  reasons: PlanReason[];
  due_at: Date;
  deadline_at: Date | null;
  staged_at: Date | null;
  live_at: Date | null;
  ended_at: Date | null;
  handed_out_at: Date | null;
  takes_over: boolean;
  created_at: Date;
  verified: number;
  of: number;
}

/** Columns of a summary; the caller adds its own WHERE on `r`. */
export const SUMMARY = `SELECT r.*, n.ssid, n.audience, coalesce(t.verified, 0)::integer AS verified, coalesce(t."of", 0)::integer AS "of"
  FROM rotations r JOIN networks n ON n.id = r.network_id
  LEFT JOIN LATERAL (SELECT count(*) AS "of", count(*) FILTER (WHERE seen = 'new' AND evidence IN ('E1','E2')) AS verified
    FROM rotation_targets WHERE rotation_id = r.id) t ON true`;

const iso = (at: Date | null): string | null => at?.toISOString() ?? null;

export function presentSummary(row: SummaryRow): RotationSummary {
  return {
    id: row.id,
    networkId: row.network_id,
    ssid: row.ssid,
    audience: row.audience,
    state: row.state,
    sentence: rotationSentence({
      state: row.state,
      driver: row.driver,
      verified: row.verified,
      of: row.of,
      handedOut: row.handed_out_at !== null || row.takes_over,
      takesOver: row.takes_over,
    }),
    mode: row.mode,
    driver: row.driver,
    plannedBy: row.planned_by,
    reasons: row.reasons,
    dueAt: row.due_at.toISOString(),
    deadlineAt: iso(row.deadline_at),
    stagedAt: iso(row.staged_at),
    liveAt: iso(row.live_at),
    endedAt: iso(row.ended_at),
    verified: row.verified,
    of: row.of,
  };
}

interface ViewRow extends SummaryRow {
  epoch: number;
  ticket: string | null;
  report_by: Date | null;
  detail: string | null;
  waived_by: string | null;
  from_passphrase_id: string | null;
  to_passphrase_id: string | null;
  ways: Rotation['ways'];
}

interface TargetRow {
  id: string;
  name: string;
  deck: string | null;
  seen: 'new' | 'old' | 'other' | 'unreachable' | null;
  evidence: 'E0' | 'E1' | 'E2' | null;
  seen_at: Date | null;
}

/** The access points of a rotation's ticket and what was last seen on each. */
export async function presentTargets(
  services: Services,
  tx: Tx,
  rotationId: string,
): Promise<z.infer<typeof accessPointOutcome>[]> {
  const rows = await services.db.rows<TargetRow>(
    tx,
    `SELECT a.id, a.name, a.deck, t.seen, t.evidence, t.seen_at FROM rotation_targets t
     JOIN access_points a ON a.id = t.access_point_id WHERE t.rotation_id = $id ORDER BY a.position, a.name, a.id`,
    { id: rotationId },
  );
  return rows.map((row) => ({
    id: row.id,
    name: row.name,
    deck: row.deck,
    seen: row.seen,
    evidence: row.evidence,
    seenAt: iso(row.seen_at),
  }));
}

/** One change as the person asking sees it. Throws `not_found` for another vessel's. */
export async function viewRotation(
  services: Services,
  tx: Tx,
  actor: Actor,
  rotationId: string,
  now: Date,
): Promise<RotationView> {
  const row = await services.db.row<ViewRow>(
    tx,
    `${SUMMARY.replace('SELECT r.*', 'SELECT r.*, ARRAY(SELECT way FROM rotation_ways w WHERE w.rotation_id = r.id ORDER BY at) AS ways')}
     WHERE r.id = $id AND r.vessel_id = $vessel`,
    { id: rotationId, vessel: actor.vesselId },
  );
  if (!row) throw notFound();
  const accessPoints = await presentTargets(services, tx, row.id);
  const rotation: Rotation = {
    state: row.state,
    mode: row.mode,
    driver: row.driver,
    ticket: row.ticket === null ? null : { epoch: row.epoch, number: Number(row.ticket) },
    from: row.from_passphrase_id,
    to: row.to_passphrase_id,
    dueAt: row.due_at,
    takesOver: row.takes_over,
    handedOutAt: row.handed_out_at,
    reportBy: row.report_by,
    targets: accessPoints.map(({ id, seen, evidence }) => ({ accessPointId: id, seen, evidence })),
    ways: row.ways,
    waivedBy: row.waived_by,
    detail: row.detail,
  };
  const plans = may(actor.roles, planAction(row.audience));
  const enters = may(actor.roles, 'rotation.enter');
  const early = (row.state === 'planned' || row.state === 'staged') && !row.takes_over;
  return {
    ...presentSummary(row),
    ticket: rotation.ticket?.number ?? null,
    handedOutAt: iso(row.handed_out_at),
    reportBy: iso(row.report_by),
    detail: row.detail,
    waived: row.waived_by !== null,
    ways: [...row.ways],
    accessPoints,
    toTry: [...toTry(rotation, now)],
    may: {
      move: plans && early,
      cancel: plans && early,
      giveUp:
        (plans || enters) && isUnderWay(row.state) && row.state !== 'reconciling' && rotation.from !== null,
      enter:
        enters &&
        (row.driver === 'by_hand' ? row.state === 'staged' || isUnderWay(row.state) : isUnderWay(row.state)),
      goOn: enters && row.driver !== 'by_hand' && (row.state === 'needs_somebody' || row.state === 'unknown'),
    },
  };
}
