import { execFile } from 'node:child_process';
import { promisify } from 'node:util';
import { QueryTypes } from 'sequelize';
import { expect } from 'vitest';
import type { Place } from '../../server/db/vault.ts';
import { checkpointKey } from '../../server/handovers/checkpoint.ts';
import { verifyChain } from '../../server/handovers/verifyChain.ts';
import { isMailKind, type MailData, writeMail } from '../../server/mail/messages.ts';
import { outboxPlace } from '../../server/mail/queueMail.ts';
import { secretPlace } from '../../server/passphrases/sealPassphrase.ts';
import type { TestApp } from './app.ts';

/** One answer of the server, kept to be searched for what must not be in it. */
export interface Recorded {
  readonly sessionId: string | null;
  readonly method: string;
  readonly path: string;
  readonly status: number;
  readonly text: string;
}

interface SecretRow {
  id: string;
  vessel_id: string;
  network_id: string;
  generation: number;
  key_id: string;
  sealed: Buffer;
}

/** Sealed texts of a query's rows (id, key_id, sealed), opened where they can be. */
async function opened(test: TestApp, sql: string, place: (id: string) => Place): Promise<string[]> {
  const rows = await system<{ id: string; key_id: string; sealed: Buffer }>(test, sql);
  return rows.flatMap((row) => {
    try {
      return [test.services.vault.open(place(row.id), { keyId: row.key_id, sealed: row.sealed })];
    } catch {
      return [];
    }
  });
}

/** Second factors' seeds and one-time tokens that lie sealed. */
async function tokens(test: TestApp): Promise<string[]> {
  const seeds = await opened(
    test,
    'SELECT id, totp_key_id AS key_id, totp_secret AS sealed FROM people WHERE totp_secret IS NOT NULL',
    (rowId) => ({ table: 'people', column: 'totp_secret', rowId }),
  );
  const mailed = await opened(
    test,
    'SELECT id, key_id, sealed FROM mail_outbox WHERE sealed IS NOT NULL',
    outboxPlace,
  );
  return [...seeds, ...mailed];
}

/** Every secret the database holds, opened with the test's own keys: the markers nobody else may have. */
export async function markers(test: TestApp): Promise<string[]> {
  return [...(await passphrases(test)), ...(await tokens(test))];
}

async function passphrases(test: TestApp): Promise<string[]> {
  const rows = await system<SecretRow>(
    test,
    `SELECT p.id, p.vessel_id, p.network_id, p.generation, s.key_id, s.sealed
     FROM passphrases p JOIN passphrase_secrets s ON s.passphrase_id = p.id WHERE s.sealed IS NOT NULL`,
  );
  const texts: string[] = [];
  for (const row of rows) {
    // A test may have damaged a row on purpose (R21); such a row hides nothing.
    try {
      texts.push(
        test.services.vault.open(
          secretPlace({
            id: row.id,
            vesselId: row.vessel_id,
            networkId: row.network_id,
            generation: row.generation,
          }),
          { keyId: row.key_id, sealed: row.sealed },
        ),
      );
    } catch {}
  }
  // Shorter ones are words that logs and SQL may hold by chance.
  return [...new Set(texts)].filter((text) => text.length >= 12);
}

function system<T extends object>(test: TestApp, sql: string): Promise<T[]> {
  return test.services.db.transaction({ kind: 'system' }, (tx) => test.services.db.rows<T>(tx, sql));
}

/** The forms in which a secret could hide in a text (R25). */
export function disguises(secret: string): string[] {
  const octets = Buffer.from(secret, 'utf8');
  return [
    secret,
    octets.toString('hex'),
    octets.toString('base64').replace(/=+$/, ''),
    octets.toString('base64url'),
    encodeURIComponent(secret),
    JSON.stringify(secret).slice(1, -1),
    [...secret].reverse().join(''),
    Buffer.from(secret, 'utf16le').toString('latin1'),
  ];
}

const forms = new Map<string, readonly string[]>();

/** Whether the text holds one of the secrets in any of its forms. */
export function findIn(text: string, secrets: readonly string[]): boolean {
  return secrets.some((secret) => {
    const known = forms.get(secret) ?? disguises(secret);
    forms.set(secret, known);
    return known.some((form) => text.includes(form));
  });
}

/** Letters of a session's id: 32 octets in base64url. */
const ID_LENGTH = 43;

/** Whether the text holds the id of a session; a test may have thousands, so the text is read once for all. */
function holdsSessionId(text: string, ids: ReadonlySet<string>): boolean {
  for (const [run] of text.matchAll(/[\w-]{43,}/g)) {
    for (let at = 0; at + ID_LENGTH <= run.length; at += 1)
      if (ids.has(run.slice(at, at + ID_LENGTH))) return true;
  }
  return false;
}

/** R28: each mail of the outbox as it reads, without its one-time token. */
async function mails(test: TestApp): Promise<{ sink: string; text: string }[]> {
  const rows = await system<{ kind: string; data: MailData[keyof MailData] }>(
    test,
    'SELECT kind, data FROM mail_outbox',
  );
  return rows.flatMap(({ kind, data }) => {
    if (!isMailKind(kind)) return [];
    const mail = writeMail(kind, data as never, { publicUrl: test.origin, secret: null });
    return [{ sink: `mail of ${kind}`, text: `${mail.subject}\n${mail.text}\n${mail.html}` }];
  });
}

/** G1: no secret in the log lines, mails, job rows, the log of handovers, error bodies, addresses or any dealer's answer. */
async function nothingLeaked(test: TestApp, recorded: readonly Recorded[]): Promise<void> {
  const codes = await passphrases(test);
  const secrets = [...codes, ...(await tokens(test))];
  for (const { sessionId } of recorded) if (sessionId) test.sessionIds.add(sessionId);
  const dealers = await dealerSessions(test, recorded);
  const names = dealers.size > 0 ? await guestNames(test) : [];
  for (const answer of recorded) {
    const where = `${answer.method} ${answer.path} answered ${answer.status}`;
    expect(findIn(answer.path, secrets), `G1: a secret in the address: ${where}`).toBe(false);
    if (answer.status >= 400)
      expect(findIn(answer.text, secrets), `G1: a secret in an error: ${where}`).toBe(false);
    if (answer.sessionId && dealers.has(answer.sessionId)) {
      expect(findIn(answer.text, codes), `G1: a passphrase for a dealer: ${where}`).toBe(false);
      expect(
        names.filter((name) => answer.text.includes(name)),
        `G1: a guest's name for a dealer: ${where}`,
      ).toEqual([]);
    }
  }
  expect(findIn(test.logged(), secrets), 'G1: a secret in the log lines').toBe(false);
  expect(holdsSessionId(test.logged(), test.sessionIds), 'G1: a session in the log lines').toBe(false);
  const sinks = await system<{ sink: string; text: string }>(
    test,
    `SELECT 'mail' AS sink, data::text || coalesce(last_error, '') || message_key AS text FROM mail_outbox
     UNION ALL SELECT 'job', coalesce(data::text, '') || coalesce(output::text, '') FROM pgboss.job
     UNION ALL SELECT 'idempotency key', coalesce(response::text, '') FROM idempotency_keys
     UNION ALL SELECT 'log entry', body::text FROM log_entries`,
  );
  for (const { sink, text } of [...sinks, ...(await mails(test))])
    expect(findIn(text, secrets) || holdsSessionId(text, test.sessionIds), `G1: a secret in a ${sink}`).toBe(
      false,
    );
}

async function dealerSessions(test: TestApp, recorded: readonly Recorded[]): Promise<Set<string>> {
  const { sha256 } = await import('../../server/http/session.ts');
  const rows = await system<{ id_hash: Buffer }>(
    test,
    `SELECT s.id_hash FROM sessions s JOIN dealer_members d ON d.person_id = s.person_id
     WHERE NOT EXISTS (SELECT 1 FROM memberships m WHERE m.person_id = s.person_id)`,
  );
  const hashes = new Set(rows.map((row) => row.id_hash.toString('hex')));
  const ids = recorded.flatMap((answer) => (answer.sessionId ? [answer.sessionId] : []));
  return new Set(ids.filter((id) => hashes.has(sha256(id).toString('hex'))));
}

async function guestNames(test: TestApp): Promise<string[]> {
  const rows = await system<{ name: string }>(test, 'SELECT name FROM guests WHERE name IS NOT NULL');
  return rows.map((row) => row.name).filter((name) => name.length >= 6);
}

/** G3: what must be true of every stored rotation (guard section 3.1, I1, I3, I5), whatever a test did. */
async function rotationsHold(test: TestApp): Promise<void> {
  const broken = await system<{ rule: string; id: string }>(
    test,
    `SELECT 'I1: a live or open ticket whose passphrase is no longer kept' AS rule, r.id::text FROM rotations r
       JOIN passphrase_secrets s ON s.passphrase_id IN (r.to_passphrase_id)
       WHERE r.state NOT IN ('planned','retired','cancelled','superseded') AND s.sealed IS NULL
     UNION ALL
     SELECT 'I1: the old passphrase of an open ticket is no longer kept', r.id::text FROM rotations r
       JOIN passphrase_secrets s ON s.passphrase_id = r.from_passphrase_id
       WHERE r.state IN ('staged','handed_out','applying','unknown','needs_somebody','reconciling') AND s.sealed IS NULL
     UNION ALL
     SELECT 'I3: live without every access point verified under its ticket', r.id::text FROM rotations r
       JOIN rotation_targets t ON t.rotation_id = r.id
       WHERE r.state = 'live' AND (t.seen IS DISTINCT FROM 'new' OR t.evidence IS NULL OR t.evidence = 'E0')
     UNION ALL
     SELECT 'I3: a live rotation whose passphrase is not the live one', r.id::text FROM rotations r
       JOIN passphrases p ON p.id = r.to_passphrase_id
       WHERE r.state = 'live' AND (p.live_at IS NULL OR p.retired_at IS NOT NULL)
     UNION ALL
     SELECT 'I4: two tickets share a number', min(r.id::text) FROM rotations r WHERE r.ticket IS NOT NULL
       GROUP BY r.network_id, r.epoch, r.ticket HAVING count(*) > 1
     UNION ALL
     SELECT 'I5: more than one open ticket', r.network_id::text FROM rotations r
       WHERE r.state IN ('planned','staged','handed_out','applying','unknown','needs_somebody','reconciling')
       GROUP BY r.network_id HAVING count(*) > 1`,
  );
  expect(broken, 'G3: rotation invariants').toEqual([]);
}

/** G2: every log that grew since it was last looked at holds from its start, and under every signed head it has. */
async function logsHold(test: TestApp): Promise<void> {
  const { db, config } = test.services;
  const key = checkpointKey(config.logSigningSeed);
  const bad = await db.transaction({ kind: 'system' }, async (tx) => {
    const heads = await db.rows<{ vessel_id: string; hash: Buffer }>(
      tx,
      'SELECT vessel_id, hash FROM log_heads WHERE seq > 0 ORDER BY vessel_id FOR UPDATE',
    );
    const found: string[] = [];
    for (const { vessel_id: vesselId, hash } of heads) {
      if (test.headsSeen.get(vesselId) === hash.toString('hex')) continue;
      const verdict = await verifyChain(db, tx, vesselId, { key, outside: [] });
      if (verdict.bad) found.push(`${vesselId}: entry ${verdict.bad.seq}: ${verdict.bad.why}`);
      test.headsSeen.set(vesselId, hash.toString('hex'));
    }
    return found;
  });
  expect(bad, 'G2: a log is not what was written').toEqual([]);
}

/** G5: no connection borrowed, no transaction open, no advisory lock left. */
async function nothingHeld(test: TestApp): Promise<void> {
  const left = await test.services.db.sequelize.query<{ what: string }>(
    `SELECT 'open transaction' AS what FROM pg_stat_activity
       WHERE datname = current_database() AND application_name = 'quayword' AND state LIKE 'idle in transaction%'
     UNION ALL SELECT 'advisory lock' FROM pg_locks l JOIN pg_database d ON d.oid = l.database
       WHERE l.locktype = 'advisory' AND d.datname = current_database()
         AND l.pid IN (SELECT pid FROM pg_stat_activity WHERE application_name = 'quayword')`,
    { type: QueryTypes.SELECT },
  );
  expect(left, 'G5: something was left open').toEqual([]);
}

/** Promises nobody waited for, since the process began. */
const unhandled: string[] = [];
process.on('unhandledRejection', (reason) => {
  unhandled.push(reason instanceof Error ? `${reason.name}: ${reason.message}` : String(reason));
});

/** G4: every promise was waited for. */
async function nothingUnhandled(): Promise<void> {
  // The process tells of a rejection only once its microtasks are through.
  await new Promise((next) => setImmediate(next));
  expect(unhandled.splice(0), 'G4: a promise was rejected and nobody waited for it').toEqual([]);
}

/** Run after every server test: the oracles of the guard that a single test cannot forget. */
export async function oracles(test: TestApp, recorded: readonly Recorded[]): Promise<void> {
  await nothingUnhandled();
  await nothingLeaked(test, recorded);
  if (!test.spoilsLogs) await logsHold(test);
  await rotationsHold(test);
  await nothingHeld(test);
}

const run = promisify(execFile);

/** G1 over the whole database as text (R25): dumped as its owner, once a file. */
export async function dumpHoldsNoSecret(test: TestApp): Promise<void> {
  const secrets = await markers(test);
  if (secrets.length + test.sessionIds.size === 0) return;
  const text = await dump(test, '--inserts');
  expect(findIn(text, secrets), 'G1: a secret in the database dump').toBe(false);
  expect(holdsSessionId(text, test.sessionIds), 'G1: a session in the database dump').toBe(false);
}

/** The whole database as pg_dump writes it in a format, read octet by octet. */
export async function dump(test: TestApp, ...format: string[]): Promise<string> {
  const { stdout } = await run('pg_dump', ['--enable-row-security', ...format, test.ownerUrl], {
    maxBuffer: 512 * 1024 * 1024,
    encoding: 'latin1',
    env: { ...process.env, PATH: `${process.env.PATH}:/usr/lib/postgresql/15/bin` },
  });
  return stdout;
}
