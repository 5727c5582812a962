import type { Services } from '../services.ts';

/** Coarser than this nobody needs to know when a boat was last heard, in milliseconds. Common practice, no source. */
const HEARD_EVERY_MS = 60_000;

/**
 * Hears the pretended boats as their equipment would be heard: each of which any access point answers. A boat that is
 * told to be silent stays unheard. Answers how many were heard now; run by several servers at once it is the same.
 */
export async function hearRehearsals(services: Services): Promise<number> {
  const now = services.clock.now();
  const heard = await services.db.transaction({ kind: 'system' }, (tx) =>
    services.db.run(
      tx,
      `UPDATE vessels SET last_heard_at = $now WHERE id IN (
         SELECT v.id FROM vessels v WHERE v.driver = 'rehearsal' AND (v.last_heard_at IS NULL OR v.last_heard_at <= $before)
           AND EXISTS (SELECT 1 FROM rehearsal_access_points a WHERE a.vessel_id = v.id AND NOT a.silent)
         ORDER BY v.id FOR NO KEY UPDATE SKIP LOCKED)
       RETURNING id`,
      { now, before: new Date(now.getTime() - HEARD_EVERY_MS) },
    ),
  );
  return heard.length;
}
