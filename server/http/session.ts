import {
  createHash,
  createHmac,
  createSecretKey,
  type KeyObject,
  randomBytes,
  timingSafeEqual,
} from 'node:crypto';
import { parse, serialize } from 'cookie';
import type { Request, Response } from 'express';
import jwt from 'jsonwebtoken';
import type { DealerRole, VesselRole } from '../../shared/rules/permissions.ts';
import type { Config } from '../config.ts';
import type { Tx } from '../db/connection.ts';
import { often } from '../db/statement.ts';
import type { Services } from '../services.ts';

export const SESSION_COOKIE = '__Host-quayword';
export const DEVICE_COOKIE = '__Host-quayword-device';
/** A session ends by itself after this long without a request, in milliseconds. */
export const IDLE_MS = 30 * 60_000;
/** And after this long whatever happens, in milliseconds. */
export const ABSOLUTE_MS = 12 * 3_600_000;
/** How long a proof of identity counts as fresh, in milliseconds. */
export const FRESH_MS = 10 * 60_000;

/** Who is asking, with the roles that count for this request's vessel. */
export interface Actor {
  readonly personId: string;
  readonly name: string;
  readonly email: string;
  readonly locale: string;
  /** SHA-256 of the session's id. */
  readonly sessionHash: Buffer;
  readonly sessionPublicId: string;
  readonly vesselId: string | null;
  readonly roles: readonly VesselRole[];
  readonly dealerId: string | null;
  readonly dealerRole: DealerRole | null;
  readonly secondFactorEnrolled: boolean;
  /** True when a role used here asks for a second factor and this session has not given one. */
  readonly secondFactorMissing: boolean;
  readonly provedAt: Date;
  /** The session's last request before this one, to the minute. */
  readonly seenAt: Date;
}

const keyObjects = new WeakMap<Buffer, KeyObject>();
// A KeyObject verifies 44 times faster than the same secret as octets.
function keyObject(secret: Buffer): KeyObject {
  const known = keyObjects.get(secret);
  if (known) return known;
  const made = createSecretKey(secret);
  keyObjects.set(secret, made);
  return made;
}

export const sha256 = (text: string | Buffer): Buffer => createHash('sha256').update(text).digest();

/** A token of 256 random bits, as text; only its SHA-256 is ever stored. */
export const newToken = (): string => randomBytes(32).toString('base64url');

export function sameText(one: string, other: string): boolean {
  return timingSafeEqual(sha256(one), sha256(other));
}

/** The session's id named by the cookie, or null when there is none or it is not ours. */
export function readSessionCookie(config: Config, request: Request): string | null {
  const token = parse(request.headers.cookie ?? '')[SESSION_COOKIE];
  if (!token || token.length > 1000) return null;
  try {
    const secret = keyNamedBy(config, token);
    if (!secret) return null;
    const claims = jwt.verify(token, keyObject(secret), {
      algorithms: ['HS256'],
      audience: 'quayword-session',
      // The session's row decides about time; the token's own end is only a second fence.
      clockTolerance: 60,
    });
    return typeof claims === 'object' && typeof claims.sid === 'string' ? claims.sid : null;
  } catch {
    return null;
  }
}

/**
 * The key of ours that a token's header names, if the header is one we write (RFC 8725 3.1 and 3.11). Only the header
 * is read: no claim counts before the signature does. Throws on a header that is no JSON.
 */
function keyNamedBy(config: Config, token: string): Buffer | undefined {
  const header: unknown = JSON.parse(Buffer.from(token.slice(0, token.indexOf('.')), 'base64url').toString());
  if (typeof header !== 'object' || header === null) return undefined;
  const { alg, typ, kid } = header as Record<string, unknown>;
  if (alg !== 'HS256' || typ !== 'JWT' || typeof kid !== 'string') return undefined;
  return config.sessionKeys.keys.get(kid);
}

export function setSessionCookie(config: Config, response: Response, sessionId: string): void {
  const kid = config.sessionKeys.current;
  const secret = config.sessionKeys.keys.get(kid);
  if (!secret) throw new Error('The current session key is missing');
  const token = jwt.sign({ sid: sessionId }, keyObject(secret), {
    algorithm: 'HS256',
    keyid: kid,
    audience: 'quayword-session',
    expiresIn: ABSOLUTE_MS / 1000,
  });
  response.append('Set-Cookie', cookieText(SESSION_COOKIE, token, ABSOLUTE_MS / 1000));
}

export function setDeviceCookie(response: Response, token: string): void {
  response.append('Set-Cookie', cookieText(DEVICE_COOKIE, token, 180 * 86_400));
}

export function readDeviceCookie(request: Request): string | null {
  const token = parse(request.headers.cookie ?? '')[DEVICE_COOKIE];
  return token && token.length <= 100 ? token : null;
}

export function clearSessionCookie(response: Response): void {
  response.append('Set-Cookie', cookieText(SESSION_COOKIE, '', 0));
}

function cookieText(name: string, value: string, maxAge: number): string {
  return serialize(name, value, { httpOnly: true, secure: true, sameSite: 'strict', path: '/', maxAge });
}

/** The value of the `X-Quayword-CSRF` header for a session: derived, so that no table holds it. */
export function csrfToken(config: Config, sessionId: string): string {
  const secret = config.sessionKeys.keys.values().next().value;
  if (!secret) throw new Error('No session key');
  return createHmac('sha256', secret).update(`csrf\0${sessionId}`).digest('base64url');
}

interface SessionRow {
  public_id: string;
  person_id: string;
  name: string;
  email: string;
  locale: string;
  last_seen_at: Date;
  proved_at: Date;
  second_factor_at: Date | null;
  totp_enrolled_at: Date | null;
  roles: VesselRole[];
  dealer_id: string | null;
  dealer_role: DealerRole | null;
  second_factor_roles: string[];
}

export const SESSION = often(`WITH seen AS (
       SELECT s.public_id, s.person_id, s.last_seen_at, s.proved_at, s.second_factor_at,
              p.name, p.email, p.locale, p.totp_enrolled_at
       FROM sessions s JOIN people p ON p.id = s.person_id
       WHERE s.id_hash = $hash AND s.ended_at IS NULL AND s.expires_at > $now AND s.last_seen_at > $idle
         AND p.disabled_at IS NULL),
     held AS (
       SELECT coalesce(array_agg(m.role), '{}') AS roles FROM memberships m, seen
       WHERE m.person_id = seen.person_id AND m.vessel_id = $vessel::uuid AND m.ended_at IS NULL
         AND m.suspended_at IS NULL AND (m.ends_at IS NULL OR m.ends_at > $now)),
     trade AS (
       SELECT d.dealer_id, d.role, l.second_factor_roles FROM dealer_members d JOIN dealers l ON l.id = d.dealer_id, seen
       WHERE d.person_id = seen.person_id AND d.ended_at IS NULL AND d.suspended_at IS NULL)
     SELECT seen.public_id, seen.person_id, seen.last_seen_at, seen.proved_at, seen.second_factor_at,
       seen.name, seen.email, seen.locale, seen.totp_enrolled_at, held.roles, trade.dealer_id, trade.role AS dealer_role,
       coalesce(CASE WHEN $vessel::uuid IS NOT NULL AND cardinality(held.roles) > 0
                     THEN vessel_second_factor_roles($vessel::uuid)
                     WHEN $fleet THEN trade.second_factor_roles END, '{}') AS second_factor_roles,
       set_config('quayword.vessel', CASE WHEN cardinality(held.roles) > 0 THEN $vessel::text ELSE '' END, true),
       set_config('quayword.scope', CASE WHEN $fleet AND trade.dealer_id IS NOT NULL THEN 'fleet'
                                         WHEN cardinality(held.roles) > 0 THEN 'vessel' ELSE '' END, true),
       set_config('quayword.dealer', CASE WHEN $fleet THEN coalesce(trade.dealer_id::text, '') ELSE '' END, true)
     FROM seen CROSS JOIN held LEFT JOIN trade ON true`);

/**
 * Finds the live session, its person, and their roles on the vessel, and sets the transaction's scope to
 * what they may see: all in one statement. Answers null when the session has ended, is idle or is unknown.
 */
export async function resolveActor(
  services: Services,
  tx: Tx,
  sessionId: string,
  place: { vesselId: string | null; fleet: boolean },
): Promise<Actor | null> {
  const now = services.clock.now();
  const sessionHash = sha256(sessionId);
  const row = await services.db.row<SessionRow>(tx, SESSION, {
    hash: sessionHash,
    now,
    idle: new Date(now.getTime() - IDLE_MS),
    vessel: place.vesselId,
    fleet: place.fleet,
  });
  if (!row) return null;
  const asked = new Set(row.second_factor_roles);
  const used: readonly string[] = place.fleet && row.dealer_role ? [row.dealer_role] : row.roles;
  return {
    personId: row.person_id,
    name: row.name,
    email: row.email,
    locale: row.locale,
    sessionHash,
    sessionPublicId: row.public_id,
    vesselId: row.roles.length > 0 ? place.vesselId : null,
    roles: row.roles,
    dealerId: row.dealer_id,
    dealerRole: row.dealer_role,
    secondFactorEnrolled: row.totp_enrolled_at !== null,
    secondFactorMissing: row.second_factor_at === null && used.some((role) => asked.has(role)),
    provedAt: row.proved_at,
    seenAt: row.last_seen_at,
  };
}

/** How coarsely a session's last request is kept, in milliseconds. */
const SEEN_MS = 60_000;

/** Whether the session's last request has to be written down again. */
export const seenLongAgo = (actor: Actor, now: Date): boolean =>
  now.getTime() - actor.seenAt.getTime() > SEEN_MS;

/** Writes down that the session was used, from which its idle time counts. */
export async function writeSeen(services: Services, tx: Tx, actor: Actor, now: Date): Promise<void> {
  await services.db.run(
    tx,
    'UPDATE sessions SET last_seen_at = $now WHERE id_hash = $hash AND last_seen_at < $now',
    { now, hash: actor.sessionHash },
  );
}
