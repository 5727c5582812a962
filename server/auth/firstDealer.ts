import { randomUUID } from 'node:crypto';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import { newToken, sha256 } from '../http/session.ts';
import type { Services } from '../services.ts';

const VALID_MS = 15 * 60_000;

/**
 * Makes the installation's first dealer and the one person of its service desk, who then adds vessels and invites
 * their captains. Answers the token of a link that sets their password, good once for 15 minutes; afterwards they
 * ask for a new one by mail like everybody. Throws `conflict` when there is a dealer already.
 */
export async function firstDealer(
  services: Services,
  tx: Tx,
  given: { dealer: string; name: string; email: string },
): Promise<string> {
  const { db, clock } = services;
  const now = clock.now();
  await db.run(tx, 'SELECT sole FROM installation FOR UPDATE');
  if (await db.row(tx, 'SELECT 1 FROM dealers LIMIT 1')) {
    throw new AppError(
      'conflict',
      'There is a dealer already. People of the service desk sign in and add vessels themselves.',
    );
  }
  const dealerId = randomUUID();
  const personId = randomUUID();
  await db.run(tx, 'INSERT INTO dealers(id, name, created_at) VALUES ($id, $name, $now)', {
    id: dealerId,
    name: given.dealer,
    now,
  });
  await db.run(
    tx,
    'INSERT INTO people(id, name, email, created_at, updated_at) VALUES ($id, $name, $email, $now, $now)',
    {
      id: personId,
      name: given.name,
      email: given.email,
      now,
    },
  );
  await db.run(
    tx,
    `INSERT INTO dealer_members(id, person_id, dealer_id, role, given_at) VALUES ($id, $person, $dealer, 'service_desk', $now)`,
    { id: randomUUID(), person: personId, dealer: dealerId, now },
  );
  const token = newToken();
  await db.run(
    tx,
    'INSERT INTO password_resets(id, person_id, token_hash, created_at, expires_at) VALUES ($id, $person, $hash, $now, $expires)',
    {
      id: randomUUID(),
      person: personId,
      hash: sha256(token),
      now,
      expires: new Date(now.getTime() + VALID_MS),
    },
  );
  return token;
}
