import { type ChildProcess, spawn } from 'node:child_process';
import { randomBytes, randomUUID } from 'node:crypto';
import { fileURLToPath } from 'node:url';
import autocannon from 'autocannon';
import jwt from 'jsonwebtoken';
import { Client } from 'pg';
import { type Config, readConfig } from '../../server/config.ts';
import { Database, type Tx } from '../../server/db/connection.ts';
import { migrate } from '../../server/db/migrate.ts';
import { statement, values } from '../../server/db/statement.ts';
import { newToken, SESSION_COOKIE, sha256 } from '../../server/http/session.ts';
import { GUESTS_ABOARD } from '../../server/voyages/guestRows.ts';
import { freePorts } from '../support/programs.ts';
import { scratchDatabase } from '../support/scratchDatabase.ts';
import { childEnv, until } from '../support/seaTrial.ts';

const ROUNDS = 15;
const CONNECTIONS = 20;
const SECONDS = 2;
const WARM_SECONDS = 3;
/** Other vessels with guests of their own, so that an index is needed to find these. */
const OTHERS = 500;

const MAIN = fileURLToPath(new URL('../../server/main.ts', import.meta.url));
const FLOOR = fileURLToPath(new URL('../support/floorServer.ts', import.meta.url));
const key = () => randomBytes(32).toString('base64');
const median = (figures: readonly number[]) =>
  [...figures].sort((one, other) => one - other)[Math.floor(figures.length / 2)] ?? Number.NaN;

/**
 * A purser's look at the arrivals of a party of eight, signed in, on the whole server, against the usual parts with
 * the same guests' statement and nothing else; each in a process of its own, with 20 connections, in turn.
 */
export async function bench(): Promise<Record<string, number>> {
  const database = await scratchDatabase('bench');
  const children: ChildProcess[] = [];
  try {
    await migrate(database);
    const config = readConfig({
      NODE_ENV: 'test',
      PUBLIC_URL: 'https://quayword.test',
      DATABASE_APP_URL: database.appUrl,
      SESSION_KEYS: `s1:${key()}`,
      VAULT_KEYS: `v1:${key()}`,
      FINGERPRINT_KEY: key(),
      PASSWORD_PEPPER: key(),
      LOG_SIGNING_SEED: key(),
    });
    const laid = await lay(config);
    const port = await freePorts(2);
    const path = `/api/vessels/${laid.vesselId}/arrivals`;
    const served = async (file: string, at: number, env: NodeJS.ProcessEnv) => {
      children.push(
        spawn(process.execPath, ['--import', 'tsx', file], {
          env: { ...childEnv(config), ...env, PORT: String(at) },
          stdio: ['ignore', 'ignore', 'inherit'],
        }),
      );
      const health = `http://127.0.0.1:${at}/api/health`;
      await until(60, `${file} serves`, async () => (await fetch(health).catch(() => null))?.ok === true);
      return `http://127.0.0.1:${at}${path}`;
    };
    const ours = await served(MAIN, port, {});
    const floor = await served(FLOOR, port + 1, {
      // As the owner of the tables, whom the fences between vessels let pass.
      DATABASE_APP_URL: database.ownerUrl,
      FLOOR: JSON.stringify({ text: laid.text, values: laid.values, path }),
    });
    await sameGuests(ours, floor, laid.cookie);
    return await rounds(ours, floor, laid.cookie);
  } finally {
    await Promise.all(children.map(ended));
    await until(30, 'nobody is connected any more', () => nobodyConnected(database.ownerUrl));
    await database.drop();
  }
}

function ended(child: ChildProcess): Promise<unknown> {
  if (child.exitCode !== null || child.signalCode !== null) return Promise.resolve();
  const over = new Promise((resolve) => child.once('exit', resolve));
  child.kill('SIGKILL');
  return over;
}

async function nobodyConnected(url: string): Promise<boolean> {
  const client = new Client({ connectionString: url });
  await client.connect();
  try {
    const others = await client.query(
      'SELECT 1 FROM pg_stat_activity WHERE datname = current_database() AND pid <> pg_backend_pid()',
    );
    return others.rowCount === 0;
  } finally {
    await client.end();
  }
}

/** Both answer the party of eight, or the figures would mean nothing. */
async function sameGuests(ours: string, floor: string, cookie: string): Promise<void> {
  const read = async (url: string) =>
    ((await (await fetch(url, { headers: { cookie } })).json()) as { guests?: { id: string }[] }).guests?.map(
      ({ id }) => id,
    );
  const [one, other] = [await read(ours), await read(floor)];
  if (one?.length !== 8 || JSON.stringify(one) !== JSON.stringify(other))
    throw new Error(`Not the same eight guests: ${one?.length} and ${other?.length}`);
}

async function load(url: string, cookie: string, seconds: number) {
  const outcome = await autocannon({ url, connections: CONNECTIONS, duration: seconds, headers: { cookie } });
  if (outcome.non2xx + outcome.errors + outcome.timeouts > 0)
    throw new Error(
      `${outcome.non2xx} refusals, ${outcome.errors} errors, ${outcome.timeouts} without answer`,
    );
  return outcome;
}

async function rounds(ours: string, floor: string, cookie: string): Promise<Record<string, number>> {
  const figures: { ours: number; floor: number; p99: number; floorP99: number }[] = [];
  await load(floor, cookie, WARM_SECONDS);
  await load(ours, cookie, WARM_SECONDS);
  for (let round = 1; round <= ROUNDS; round++) {
    const plain = await load(floor, cookie, SECONDS);
    const whole = await load(ours, cookie, SECONDS);
    figures.push({
      ours: whole.requests.average,
      floor: plain.requests.average,
      p99: whole.latency.p99,
      floorP99: plain.latency.p99,
    });
    console.log(
      `round ${round} of ${ROUNDS}: ${Math.round(whole.requests.average)}/s of ${Math.round(plain.requests.average)}/s`,
    );
  }
  return {
    requestsPerSecond: Math.round(median(figures.map((one) => one.ours))),
    floorPerSecond: Math.round(median(figures.map((one) => one.floor))),
    ratio: Math.round(median(figures.map((one) => one.ours / one.floor)) * 100) / 100,
    p99Ms: median(figures.map((one) => one.p99)),
    floorP99Ms: median(figures.map((one) => one.floorP99)),
    rounds: ROUNDS,
  };
}

interface Laid {
  readonly vesselId: string;
  readonly cookie: string;
  readonly text: string;
  readonly values: unknown[];
}

/** A vessel with her party aboard, a purser signed in, and many other vessels. */
async function lay(config: Config): Promise<Laid> {
  const db = new Database(config.databaseUrl, { poolMax: 1 });
  const now = new Date();
  const [vessel, purser, party, network, passphrase] = Array.from({ length: 5 }, () => randomUUID());
  const sessionId = newToken();
  const bind = { vessel, purser, party, network, passphrase, session: sha256(sessionId), now };
  try {
    await db.transaction({ kind: 'system' }, async (tx) => {
      for (const sql of ROWS) await some(db, tx, sql, { ...bind, others: OTHERS });
    });
  } finally {
    await db.close();
  }
  const read = statement(GUESTS_ABOARD);
  const asked = {
    vessel,
    party,
    since: new Date(now.getTime() - 12 * 3_600_000),
    live: passphrase,
    staged: null,
    stagedFrom: null,
  };
  const token = jwt.sign({ sid: sessionId }, config.sessionKeys.keys.get('s1') ?? '', {
    keyid: 's1',
    audience: 'quayword-session',
    expiresIn: 43_200,
  });
  return {
    vesselId: vessel ?? '',
    cookie: `${SESSION_COOKIE}=${token}`,
    text: read.text,
    values: values(read, asked),
  };
}

/** Runs a statement with those of the values that it names. */
function some(db: Database, tx: Tx, sql: string, bind: Record<string, unknown>): Promise<object[]> {
  return db.run(tx, sql, Object.fromEntries(statement(sql).names.map((name) => [name, bind[name]])));
}

const ROWS = [
  `INSERT INTO vessels(id, name, source, second_factor_roles, created_at, updated_at) VALUES ($vessel, 'Tamarisk', 'dock', '{}', $now, $now)`,
  `INSERT INTO vessels(id, name, second_factor_roles, created_at, updated_at)
   SELECT gen_random_uuid(), 'Vessel ' || n, '{}', $now, $now FROM generate_series(1, $others::int) n`,
  `INSERT INTO ship_zones(id, vessel_id, zone, from_at) SELECT gen_random_uuid(), id, 'Europe/Zagreb', '2020-01-01Z' FROM vessels`,
  `INSERT INTO cabins(id, vessel_id, deck, name, position)
   SELECT gen_random_uuid(), v.id, 'Lower deck', 'Cabin ' || n, n FROM vessels v, generate_series(1, 4) n`,
  `INSERT INTO people(id, name, email, created_at, updated_at) VALUES ($purser, 'Ilse Marchetti', 'purser@tamarisk.example', $now, $now)`,
  `INSERT INTO memberships(id, person_id, vessel_id, role, given_at) VALUES (gen_random_uuid(), $purser, $vessel, 'purser', $now)`,
  `INSERT INTO sessions(id_hash, public_id, person_id, label, created_at, last_seen_at, expires_at, proved_at)
   VALUES ($session, gen_random_uuid(), $purser, 'Chromium', $now, $now, $now::timestamptz + interval '12 hours', $now)`,
  `INSERT INTO networks(id, vessel_id, ssid, audience, security, created_at, updated_at) VALUES ($network, $vessel, 'Tamarisk guests', 'guest', 'wpa2', $now, $now)`,
  `INSERT INTO networks(id, vessel_id, ssid, audience, security, created_at, updated_at)
   SELECT gen_random_uuid(), id, 'Guests', 'guest', 'wpa2', $now, $now FROM vessels WHERE id <> $vessel`,
  `INSERT INTO passphrases(id, vessel_id, network_id, generation, bits, origin, created_at, live_at)
   SELECT CASE WHEN n.id = $network THEN $passphrase::uuid ELSE gen_random_uuid() END, n.vessel_id, n.id, 1, 64.62, 'generated', $now, $now FROM networks n`,
  `INSERT INTO parties(id, vessel_id, name, arrives_at, leaves_at, created_at, updated_at)
   SELECT CASE WHEN id = $vessel THEN $party::uuid ELSE gen_random_uuid() END, id, 'Brandvold party',
     $now::timestamptz - interval '1 day', $now::timestamptz + interval '6 days', $now, $now FROM vessels`,
  `INSERT INTO guests(id, vessel_id, party_id, cabin_id, name, label, from_at, until_at, position, created_at, updated_at)
   SELECT gen_random_uuid(), p.vessel_id, p.id, (SELECT c.id FROM cabins c WHERE c.vessel_id = p.vessel_id AND c.position = (n + 1) / 2),
     'Guest number ' || n, 'Guest ' || n, p.arrives_at, p.leaves_at, n, $now, $now FROM parties p, generate_series(1, 8) n`,
  `INSERT INTO cards(id, vessel_id, network_id, passphrase_id, serial, format, language, guest_id, state, printed_at)
   SELECT gen_random_uuid(), g.vessel_id, x.network_id, x.id, 'M-' || (1000 + g.position), 'wallet', 'en', g.id,
     CASE WHEN g.position <= 4 THEN 'handed_over' ELSE 'printed' END, $now
   FROM guests g JOIN passphrases x ON x.vessel_id = g.vessel_id`,
  `INSERT INTO handovers(id, vessel_id, network_id, passphrase_id, holder_kind, holder_id, channel, card_id, at)
   SELECT gen_random_uuid(), vessel_id, network_id, passphrase_id, 'guest', guest_id, 'card', id, $now FROM cards
   WHERE state = 'handed_over'`,
];
