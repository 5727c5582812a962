import { randomUUID } from 'node:crypto';
import type { Request, Response } from 'express';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import {
  newToken,
  readDeviceCookie,
  readSessionCookie,
  setDeviceCookie,
  setSessionCookie,
  sha256,
} from '../http/session.ts';
import { queueMail } from '../mail/queueMail.ts';
import type { Services } from '../services.ts';
import { hashPassword, needsNewHash, passwordMatches } from './passwords.ts';
import { takeSecondFactor } from './secondFactor.ts';
import { deviceLabel, openSession } from './sessions.ts';
import {
  accountLimit,
  addressLimit,
  codeLimit,
  countFailure,
  deviceLimit,
  everybodyLimit,
  forgetFailures,
  refuseWhileClosed,
} from './throttle.ts';

export interface Credentials {
  readonly email: string;
  readonly password: string;
  readonly code?: string | undefined;
}

interface PersonRow {
  id: string;
  name: string;
  email: string;
  password_hash: string | null;
  totp_enrolled_at: Date | null;
  disabled_at: Date | null;
}

export interface Checked {
  readonly person: PersonRow;
  readonly knownDevice: string | null;
}

const wrong = () =>
  new AppError('wrong_sign_in', 'The mail address and the password do not belong together.');

/**
 * Checks mail and password. Unknown, disabled and wrong cost the same and answer the same. Failures are counted by
 * account, by address and all together; a browser that signed this person in before is counted by itself, so that
 * nobody can lock the real person out by guessing.
 */
export async function checkPassword(
  services: Services,
  request: Request,
  given: Credentials,
): Promise<Checked> {
  const { db, config } = services;
  const email = given.email.trim().toLowerCase();
  const deviceToken = readDeviceCookie(request);
  const { person, knownDevice } = await db.transaction({ kind: 'none' }, async (tx) => {
    const found = await db.row<PersonRow>(
      tx,
      'SELECT id, name, email, password_hash, totp_enrolled_at, disabled_at FROM people WHERE email = $email',
      { email },
    );
    const device =
      found && deviceToken
        ? await db.row<{ id: string }>(
            tx,
            'SELECT id FROM known_devices WHERE person_id = $person AND token_hash = $hash',
            { person: found.id, hash: sha256(deviceToken) },
          )
        : null;
    return { person: found, knownDevice: device?.id ?? null };
  });
  const address = request.ip ?? 'unknown';
  const limits = knownDevice
    ? [deviceLimit(knownDevice)]
    : [addressLimit(address), everybodyLimit, accountLimit(email)];
  await refuseWhileClosed(services, limits);
  const usable = person && !person.disabled_at ? person.password_hash : null;
  const matches = await passwordMatches(config, usable, given.password);
  if (!matches || !person) {
    await countFailure(services, limits);
    throw wrong();
  }
  return { person, knownDevice };
}

/** Asks for and checks the second factor of somebody whose password was right. True when one was given. */
export async function checkSecondFactor(
  services: Services,
  person: { id: string; totp_enrolled_at: Date | null },
  code: string | undefined,
): Promise<boolean> {
  if (!person.totp_enrolled_at) return false;
  if (code === undefined) throw new AppError('code_needed', 'Now give the code from your authenticator app.');
  await refuseWhileClosed(services, [codeLimit(person.id)]);
  const taken = await services.db.transaction({ kind: 'none' }, (tx) =>
    takeSecondFactor(services, tx, person.id, code),
  );
  if (!taken) {
    await countFailure(services, [codeLimit(person.id)]);
    throw new AppError(
      'wrong_sign_in',
      'That code did not match or was used already. Wait for the next one.',
      {
        errors: { code: ['Wait for the next code and give that one.'] },
      },
    );
  }
  await forgetFailures(services, codeLimit(person.id));
  return true;
}

export interface Admitted {
  readonly checked: Checked;
  readonly secondFactor: boolean;
  readonly newHash: string | null;
}

/** Everything slow or counted about signing in, before the transaction that opens the session. */
export async function admitPerson(
  services: Services,
  request: Request,
  given: Credentials,
): Promise<Admitted> {
  const checked = await checkPassword(services, request, given);
  const secondFactor = await checkSecondFactor(services, checked.person, given.code);
  await forgetFailures(
    services,
    checked.knownDevice ? deviceLimit(checked.knownDevice) : accountLimit(checked.person.email),
  );
  const stored = checked.person.password_hash;
  const newHash = stored && needsNewHash(stored) ? await hashPassword(services.config, given.password) : null;
  return { checked, secondFactor, newHash };
}

/** Opens the session of an admitted person, in a new id, and remembers the browser. */
export async function signIn(
  services: Services,
  tx: Tx,
  { request, response, admitted }: { request: Request; response: Response; admitted: Admitted },
): Promise<{ endedOldest: boolean }> {
  const { db, config } = services;
  const now = services.clock.now();
  const { person, knownDevice } = admitted.checked;
  // What the browser was signed in to before ends, so that an id seen or planted earlier is worth nothing.
  const earlier = readSessionCookie(config, request);
  if (earlier) {
    await db.run(tx, 'UPDATE sessions SET ended_at = $now WHERE id_hash = $hash AND ended_at IS NULL', {
      now,
      hash: sha256(earlier),
    });
  }
  const label = deviceLabel(request.headers['user-agent']);
  const { sessionId, endedOldest } = await openSession(services, tx, {
    personId: person.id,
    label,
    secondFactor: admitted.secondFactor,
  });
  if (admitted.newHash) {
    await db.run(tx, 'UPDATE people SET password_hash = $hash WHERE id = $id', {
      id: person.id,
      hash: admitted.newHash,
    });
  }
  if (knownDevice) {
    await db.run(tx, 'UPDATE known_devices SET last_used_at = $now WHERE id = $id', { id: knownDevice, now });
  } else {
    await rememberDevice(services, tx, { person, label, now, response });
  }
  setSessionCookie(config, response, sessionId);
  return { endedOldest };
}

async function rememberDevice(
  services: Services,
  tx: Tx,
  given: { person: PersonRow; label: string; now: Date; response: Response },
): Promise<void> {
  const { person, label, now } = given;
  const id = randomUUID();
  const token = newToken();
  const before = await services.db.row(tx, 'SELECT 1 FROM known_devices WHERE person_id = $id LIMIT 1', {
    id: person.id,
  });
  await services.db.run(
    tx,
    'INSERT INTO known_devices(id, person_id, token_hash, label, created_at, last_used_at) VALUES ($id, $person, $hash, $label, $now, $now)',
    { id, person: person.id, hash: sha256(token), label, now },
  );
  setDeviceCookie(given.response, token);
  if (before) {
    await queueMail(services, tx, {
      kind: 'new_device',
      to: person.email,
      messageKey: `new_device:${id}`,
      data: { name: person.name, device: label, at: now.toISOString() },
    });
  }
}
