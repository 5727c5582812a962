import { type ChildProcess, spawn } from 'node:child_process';
import { randomUUID } from 'node:crypto';
import { fileURLToPath } from 'node:url';
import type { Config, KeyRing } from '../../server/config.ts';
import { generate } from '../../server/passphrases/generate.ts';
import { sealPassphrases } from '../../server/passphrases/sealPassphrase.ts';
import type { Services } from '../../server/services.ts';

const MAIN = fileURLToPath(new URL('../../server/main.ts', import.meta.url));

const ring = ({ current, keys }: KeyRing): string =>
  [current, ...[...keys.keys()].filter((kid) => kid !== current)]
    .map((kid) => `${kid}:${keys.get(kid)?.toString('base64') ?? ''}`)
    .join(',');

/** The settings of a server process that shares this one's keys and database. */
export function childEnv(config: Config): NodeJS.ProcessEnv {
  return {
    PATH: process.env.PATH,
    NODE_ENV: 'test',
    PORT: '0',
    PUBLIC_URL: config.publicUrl,
    DATABASE_APP_URL: config.databaseUrl,
    SESSION_KEYS: ring(config.sessionKeys),
    VAULT_KEYS: ring(config.vaultKeys),
    FINGERPRINT_KEY: config.fingerprintKey.toString('base64'),
    PASSWORD_PEPPER: config.passwordPepper.toString('base64'),
    LOG_SIGNING_SEED: config.logSigningSeed.toString('base64'),
  };
}

export interface ServerProcess {
  readonly process: ChildProcess;
  /** Resolves with the signal or code it ended by. */
  readonly ended: Promise<string>;
  readonly output: () => string;
  readonly isOver: () => boolean;
}

/** A whole server as its own process; with `fault`, it ends itself at that named step. */
export function startServerProcess(env: NodeJS.ProcessEnv, fault?: string): ServerProcess {
  const child = spawn(process.execPath, ['--import', 'tsx', MAIN], {
    env: { ...env, ...(fault ? { QW_FAULT: fault } : {}) },
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  let text = '';
  let over = false;
  child.stdout.on('data', (chunk) => (text += String(chunk)));
  child.stderr.on('data', (chunk) => (text += String(chunk)));
  const ended = new Promise<string>((resolve) => {
    child.once('exit', (code, signal) => {
      over = true;
      resolve(signal ?? String(code));
    });
  });
  return { process: child, ended, output: () => text, isOver: () => over };
}

/** Asks the database until it is so, or says what was missing after `seconds`. */
export async function until(seconds: number, what: string, isSo: () => Promise<boolean>): Promise<void> {
  const end = Date.now() + seconds * 1000;
  for (;;) {
    if (await isSo()) return;
    if (Date.now() > end) throw new Error(`After ${seconds} s still not so: ${what}`);
    await new Promise((next) => setTimeout(next, 50));
  }
}

/** Rehearsal vessels of two access points and four networks each, every network with a change due a minute ago. */
export async function layDueChanges(services: Services, networks: number): Promise<string[]> {
  const { db } = services;
  const now = services.clock.now();
  const liveAt = new Date(now.getTime() - 10 * 86_400_000);
  const rows = Array.from({ length: networks }, (_, index) => ({
    id: randomUUID(),
    vessel_id: '',
    rotation_id: randomUUID(),
    ssid: `Sea trial ${index % 4}`,
  }));
  const vessels = Array.from({ length: Math.ceil(networks / 4) }, (_, index) => ({
    id: randomUUID(),
    name: `Trial ${index}`,
  }));
  for (const [index, row] of rows.entries()) row.vessel_id = vessels[Math.floor(index / 4)]?.id ?? '';
  await db.transaction({ kind: 'system' }, async (tx) => {
    await db.run(
      tx,
      `INSERT INTO vessels(id, name, driver, second_factor_roles, created_at, updated_at)
       SELECT id, name, 'rehearsal', '{}', $now, $now FROM jsonb_to_recordset($rows::jsonb) AS v(id uuid, name text)`,
      { rows: JSON.stringify(vessels), now },
    );
    await db.run(
      tx,
      `WITH v AS (SELECT id FROM jsonb_to_recordset($rows::jsonb) AS v(id uuid)),
       z AS (INSERT INTO ship_zones(id, vessel_id, zone, from_at) SELECT gen_random_uuid(), id, 'Europe/Zagreb', '2020-01-01Z' FROM v)
       INSERT INTO access_points(id, vessel_id, name, position)
       SELECT gen_random_uuid(), v.id, p.name, p.position FROM v, (VALUES ('Salon', 1), ('Sundeck', 2)) AS p(name, position)`,
      { rows: JSON.stringify(vessels) },
    );
    await db.run(
      tx,
      `WITH n AS (SELECT * FROM jsonb_to_recordset($rows::jsonb) AS n(id uuid, vessel_id uuid, ssid text)),
       made AS (INSERT INTO networks(id, vessel_id, ssid, audience, security, last_generation, created_at, updated_at)
         SELECT id, vessel_id, ssid, 'crew', 'wpa2', 1, $now, $now FROM n)
       INSERT INTO policies(network_id, vessel_id, age_limit_days, updated_at) SELECT id, vessel_id, 45, $now FROM n`,
      { rows: JSON.stringify(rows), now },
    );
    await sealPassphrases(
      services,
      tx,
      rows.map((row) => {
        const { passphrase, bits } = generate();
        return {
          id: randomUUID(),
          vesselId: row.vessel_id,
          networkId: row.id,
          passphrase,
          fingerprint: services.vault.fingerprint(row.vessel_id, passphrase),
          bits,
          origin: 'generated' as const,
          generation: 1,
          now: liveAt,
        };
      }),
    );
    const ids = rows.map((row) => row.id);
    await db.run(tx, 'UPDATE passphrases SET live_at = created_at WHERE network_id = ANY($ids::uuid[])', {
      ids,
    });
    await db.run(
      tx,
      `INSERT INTO rehearsal_access_points(access_point_id, network_id, vessel_id, passphrase_id)
       SELECT a.id, n.id, n.vessel_id, p.id FROM networks n JOIN access_points a ON a.vessel_id = n.vessel_id
       JOIN passphrases p ON p.network_id = n.id WHERE n.id = ANY($ids::uuid[])`,
      { ids },
    );
    await db.run(
      tx,
      `INSERT INTO rotations(id, vessel_id, network_id, state, driver, epoch, planned_by, due_at, occurrence, created_at, updated_at)
       SELECT rotation_id, vessel_id, id, 'planned', 'rehearsal', 1, 'plan', $due, 'trial', $now, $now
       FROM jsonb_to_recordset($rows::jsonb) AS n(id uuid, vessel_id uuid, rotation_id uuid)`,
      { rows: JSON.stringify(rows), due: new Date(now.getTime() - 60_000), now },
    );
  });
  return rows.map((row) => row.rotation_id);
}

/** How many of these rotations are in one of the states. */
export async function countIn(
  services: Services,
  ids: readonly string[],
  ...states: string[]
): Promise<number> {
  const row = await services.db.transaction({ kind: 'system' }, (tx) =>
    services.db.row<{ count: string }>(
      tx,
      'SELECT count(*) FROM rotations WHERE id = ANY($ids::uuid[]) AND state = ANY($states)',
      { ids, states },
    ),
  );
  return Number(row?.count ?? 0);
}

export interface Verdict {
  /** Rotations that are not in force, or whose log lacks a line or has one twice. */
  readonly lost: string[];
  /** Networks whose access points run something that is neither in force nor kept to be tried. */
  readonly lockedOut: string[];
}

/** Compares log, passphrases and access points: each rotation happened exactly once, nobody is locked out. */
export async function judge(services: Services, ids: readonly string[]): Promise<Verdict> {
  const { db } = services;
  return db.transaction({ kind: 'system' }, async (tx) => {
    const lost = await db.rows<{ what: string }>(
      tx,
      `WITH mine AS (SELECT * FROM rotations WHERE id = ANY($ids::uuid[]))
       SELECT 'state ' || state || ' of ' || id AS what FROM mine WHERE state <> 'live'
       UNION ALL
       SELECT 'passphrases ' || count(*) || ' of ' || m.id FROM mine m JOIN passphrases p ON p.network_id = m.network_id
         GROUP BY m.id HAVING count(*) <> 2 OR count(*) FILTER (WHERE p.live_at IS NOT NULL AND p.retired_at IS NULL) <> 1
       UNION ALL
       SELECT 'log ' || k.kind || ' ' || count(l.id) || ' times of ' || m.id FROM mine m
         CROSS JOIN (VALUES ('rotation.staged'), ('rotation.handed_out'), ('rotation.live')) AS k(kind)
         LEFT JOIN log_entries l ON l.subject_id = m.id AND l.kind = k.kind
         GROUP BY m.id, k.kind HAVING count(l.id) <> 1
       UNION ALL
       SELECT 'observations ' || count(o.id) || ' of ' || m.id FROM mine m LEFT JOIN observations o ON o.rotation_id = m.id
         GROUP BY m.id HAVING count(o.id) <> 2
       UNION ALL
       SELECT 'ticket ' || m.ticket || ' of ' || m.id FROM mine m JOIN networks n ON n.id = m.network_id
         WHERE m.ticket <> 1 OR n.last_ticket <> 1 OR n.last_generation <> 2
       UNION ALL
       SELECT 'log chain of ' || vessel_id FROM (
         SELECT vessel_id, seq, prev_hash, lag(hash) OVER (PARTITION BY vessel_id ORDER BY seq) AS before,
           row_number() OVER (PARTITION BY vessel_id ORDER BY seq) AS place FROM log_entries
         WHERE vessel_id IN (SELECT vessel_id FROM mine)) c
         WHERE c.seq <> c.place OR (c.place > 1 AND c.prev_hash <> c.before)`,
      { ids },
    );
    const lockedOut = await db.rows<{ what: string }>(
      tx,
      `SELECT DISTINCT 'network ' || a.network_id AS what FROM rehearsal_access_points a
       JOIN rotations m ON m.network_id = a.network_id AND m.id = ANY($ids::uuid[])
       JOIN passphrase_secrets s ON s.passphrase_id = a.passphrase_id
       WHERE s.sealed IS NULL OR NOT (
         EXISTS (SELECT 1 FROM passphrases p WHERE p.id = a.passphrase_id AND p.live_at IS NOT NULL AND p.retired_at IS NULL)
         OR a.passphrase_id IN (m.to_passphrase_id, m.from_passphrase_id)
            AND m.state IN ('handed_out','applying','unknown','needs_somebody'))`,
      { ids },
    );
    return { lost: lost.map(({ what }) => what), lockedOut: lockedOut.map(({ what }) => what) };
  });
}

/** Several faults in a row on the same changes: each server takes over and ends itself at its own step, the last goes on. */
export async function tryFaults(
  services: Services,
  points: readonly string[],
  networks: number,
): Promise<Verdict & { neverReached: string[] }> {
  const ids = await layDueChanges(services, networks);
  const env = childEnv(services.config);
  const done = async () => (await countIn(services, ids, 'live')) === ids.length;
  const neverReached: string[] = [];
  const lockedOut: string[] = [];
  for (const point of points) {
    const server = startServerProcess(env, point);
    await until(60, `${point} is reached or everything is done`, async () => server.isOver() || done());
    if (!server.isOver()) {
      neverReached.push(point);
      server.process.kill('SIGKILL');
    }
    await server.ended;
    lockedOut.push(...(await judge(services, ids)).lockedOut);
  }
  const last = startServerProcess(env);
  try {
    await until(90, 'all changes are in force', async () => last.isOver() || done());
  } catch {
    // The verdict names what is missing.
  }
  last.process.kill('SIGKILL');
  await last.ended;
  const after = await judge(services, ids);
  return { lost: after.lost, lockedOut: [...lockedOut, ...after.lockedOut], neverReached };
}

/** One fault, and judged as above: also in between, when nobody may be locked out either. */
export async function tryFault(
  services: Services,
  point: string,
  networks: number,
): Promise<Verdict & { fired: boolean }> {
  const { neverReached, ...verdict } = await tryFaults(services, [point], networks);
  return { ...verdict, fired: neverReached.length === 0 };
}

/** The last step of all: a server ends itself while it forgets retired secrets, and the next one forgets them. */
export async function tryPurgeFault(
  services: Services,
  networks: number,
): Promise<Verdict & { fired: boolean }> {
  const ids = await layDueChanges(services, networks);
  const env = childEnv(services.config);
  const before = startServerProcess(env);
  await until(
    90,
    'the changes are in force',
    async () => (await countIn(services, ids, 'live')) === ids.length,
  );
  before.process.kill('SIGKILL');
  await before.ended;
  await services.db.transaction({ kind: 'system' }, (tx) =>
    services.db.run(
      tx,
      `UPDATE passphrases SET retired_at = retired_at - interval '8 days' WHERE retired_at IS NOT NULL
       AND network_id IN (SELECT network_id FROM rotations WHERE id = ANY($ids::uuid[]))`,
      { ids },
    ),
  );
  const kept = async () => {
    const rows = await services.db.transaction({ kind: 'system' }, (tx) =>
      services.db.rows<{ retired: boolean; marked: boolean }>(
        tx,
        `SELECT p.retired_at IS NOT NULL AS retired, p.purged_at IS NOT NULL AS marked FROM passphrases p
         JOIN passphrase_secrets s ON s.passphrase_id = p.id
         JOIN rotations r ON r.network_id = p.network_id AND r.id = ANY($ids::uuid[])
         WHERE s.sealed IS NOT NULL`,
        { ids },
      ),
    );
    return {
      retired: rows.filter((row) => row.retired).length,
      torn: rows.filter((row) => row.marked).length,
    };
  };
  const first = startServerProcess(env, 'S12');
  await until(60, 'S12 is reached', async () => first.isOver() || (await kept()).retired === 0);
  const fired = first.isOver();
  if (!fired) first.process.kill('SIGKILL');
  await first.ended;
  const between = await kept();
  const second = startServerProcess(env);
  await until(60, 'retired secrets are forgotten', async () => (await kept()).retired === 0);
  second.process.kill('SIGKILL');
  await second.ended;
  const after = await judge(services, ids);
  const torn = between.torn > 0 ? [`${between.torn} secrets marked as forgotten but kept`] : [];
  return { lost: [...after.lost, ...torn], lockedOut: after.lockedOut, fired };
}
