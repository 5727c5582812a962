import { PURGE_AFTER_MS } from '../../shared/rules/rotation.ts';
import { faultPoint } from '../faultPoint.ts';
import type { Services } from '../services.ts';

const BATCH = 200;

/**
 * Forgets the secrets of retired passphrases whose time is up, where the one in force is proven on every access
 * point and no open change uses the old one. The fingerprint stays, so that it is never used again. Answers
 * how many were forgotten.
 */
export async function purgeRetired(services: Services): Promise<number> {
  const now = services.clock.now();
  return services.db.transaction({ kind: 'system' }, async (tx) => {
    const purged = await services.db.run<{ id: string }>(
      tx,
      `WITH due AS (
         SELECT p.id FROM passphrases p
         WHERE p.retired_at <= $before AND p.purged_at IS NULL
           AND NOT EXISTS (SELECT 1 FROM rotations r WHERE p.id IN (r.from_passphrase_id, r.to_passphrase_id)
             AND r.network_id = p.network_id
             AND r.state IN ('planned','staged','handed_out','applying','unknown','needs_somebody','reconciling'))
           AND EXISTS (SELECT 1 FROM rotations l WHERE l.network_id = p.network_id AND l.state = 'live'
             AND l.to_passphrase_id <> p.id
             AND EXISTS (SELECT 1 FROM rotation_targets t WHERE t.rotation_id = l.id)
             AND NOT EXISTS (SELECT 1 FROM rotation_targets t WHERE t.rotation_id = l.id
               AND (t.seen IS DISTINCT FROM 'new' OR t.evidence IS NULL OR t.evidence = 'E0')))
         ORDER BY p.retired_at LIMIT $batch FOR UPDATE OF p SKIP LOCKED),
       marked AS (UPDATE passphrases p SET purged_at = $now FROM due WHERE p.id = due.id)
       UPDATE passphrase_secrets s SET sealed = NULL FROM due WHERE s.passphrase_id = due.id RETURNING due.id`,
      { before: new Date(now.getTime() - PURGE_AFTER_MS), now, batch: BATCH },
    );
    faultPoint('S12');
    return purged.length;
  });
}
