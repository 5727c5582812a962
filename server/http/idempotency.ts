import { createHash } from 'node:crypto';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import type { Services } from '../services.ts';
import type { AnyContract, Presented } from './reply.ts';
import type { Actor } from './session.ts';

interface Once {
  readonly services: Services;
  readonly tx: Tx;
  readonly actor: Actor;
  readonly now: Date;
  readonly params: unknown;
  readonly body: unknown;
  readonly request: { headers: Record<string, string | string[] | undefined> };
}

interface KeyRow {
  body_hash: Buffer;
  status: number | null;
  response: unknown;
}

/**
 * Does the work of one `Idempotency-Key` once, in the transaction that holds the key's row: a repeat gets
 * the first answer, a twin running at the same moment waits for it, another body is refused.
 */
export async function idempotent(
  context: Once,
  contract: AnyContract,
  work: () => Promise<Presented>,
): Promise<Presented> {
  const key = context.request.headers['idempotency-key'];
  if (typeof key !== 'string' || contract.secret || typeof contract.response === 'string') return work();
  if (!/^[\w-]{8,100}$/.test(key)) {
    throw new AppError('malformed', 'The Idempotency-Key must be 8 to 100 letters, digits, - or _.');
  }
  const { services, tx, actor, now } = context;
  const bind = {
    person: actor.personId,
    route: contract.name,
    key,
    vessel: actor.vesselId,
    hash: bodyHash([context.params, context.body]),
    now,
  };
  const claimed = await services.db.run(
    tx,
    `INSERT INTO idempotency_keys(person_id, route, key, vessel_id, body_hash, created_at)
     VALUES ($person, $route, $key, $vessel, $hash, $now) ON CONFLICT DO NOTHING RETURNING 1`,
    bind,
  );
  if (claimed.length === 0) {
    const known = await services.db.row<KeyRow>(
      tx,
      'SELECT body_hash, status, response FROM idempotency_keys WHERE person_id = $person AND route = $route AND key = $key',
      { person: bind.person, route: bind.route, key: bind.key },
    );
    if (!known?.body_hash.equals(bind.hash)) {
      throw new AppError(
        'key_reused',
        'That request was already used for something else. Reload the page and try again.',
      );
    }
    if (known.status === null) throw new AppError('conflict', 'The same request is still being carried out.');
    return { status: known.status, json: known.response };
  }
  const reply = await work();
  await services.db.run(
    tx,
    'UPDATE idempotency_keys SET status = $status, response = $response WHERE person_id = $person AND route = $route AND key = $key',
    {
      status: reply.status,
      response: JSON.stringify(reply.json ?? null),
      person: bind.person,
      route: bind.route,
      key: bind.key,
    },
  );
  return reply;
}

const bodyHash = (body: unknown): Buffer =>
  createHash('sha256')
    .update(JSON.stringify(body ?? null))
    .digest();
