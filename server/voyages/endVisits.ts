import { appendLog } from '../handovers/appendLog.ts';
import { markDeparted } from '../handovers/holders.ts';
import { lockLog } from '../handovers/lockLog.ts';
import { replanNetwork } from '../rotations/replan.ts';
import type { Services } from '../services.ts';

interface Visitor {
  id: string;
  name: string | null;
  until_at: Date;
}

/**
 * Visitors have an end time and nobody who signs them off: when it passes they are ashore, and what they were
 * given is exposed. Answers how many.
 */
export async function endVisits(services: Services): Promise<number> {
  const { db } = services;
  const now = services.clock.now();
  const vessels = await db.transaction({ kind: 'system' }, (tx) =>
    db.rows<{ id: string }>(tx, `SELECT DISTINCT vessel_id AS id FROM guests WHERE ${OVER}`, { now }),
  );
  let ended = 0;
  for (const { id: vesselId } of vessels) {
    ended += await db.transaction({ kind: 'vessel', vesselId }, async (tx) => {
      await lockLog(services, tx, vesselId);
      const gone = await db.run<Visitor>(
        tx,
        `UPDATE guests SET ashore_at = until_at, updated_at = $now WHERE vessel_id = $vessel AND ${OVER}
         RETURNING id, name, until_at`,
        { now, vessel: vesselId },
      );
      await appendLog(
        services,
        tx,
        gone.map((visitor) => ({
          vesselId,
          kind: 'guest.ashore',
          at: now,
          subject: { kind: 'guest', id: visitor.id, name: visitor.name },
          body: { endTime: visitor.until_at.toISOString() },
        })),
      );
      const exposed = await markDeparted(
        services,
        tx,
        { vesselId, kind: 'guest', ids: gone.map(({ id }) => id) },
        now,
      );
      for (const networkId of exposed) await replanNetwork(services, tx, networkId, now);
      return gone.length;
    });
  }
  return ended;
}

const OVER = 'party_id IS NULL AND ashore_at IS NULL AND erased_at IS NULL AND until_at <= $now';
