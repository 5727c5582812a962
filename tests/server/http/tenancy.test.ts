import { randomUUID } from 'node:crypto';
import { beforeAll, describe, expect, test } from 'vitest';
import { Database, type Scope } from '../../../server/db/connection.ts';
import { layDemo } from '../../../server/seeders/layDemo.ts';
import { useApp } from '../../support/app.ts';
import { contents } from './contents.ts';

const app = useApp();
const all = contents(app);

/** Tables with a `vessel_id` that the database does not fence, each with why its filter in the code is all there is. */
const UNFENCED: Record<string, string> = {
  memberships: 'read to find out what a person may see at all, across all their vessels',
  invitations: 'found by their token before anybody is signed in',
  mail_outbox: 'sent by a job for every vessel and for people without one; no route reads it',
  idempotency_keys: 'found by person, route and key',
};

/** A vessel with rows in every fenced table, and tables as the catalogue knows them. */
const world = { mine: '', fenced: [] as string[] };

const inScope = <T extends object>(scope: Scope, sql: string, bind: Record<string, unknown> = {}) =>
  app.services.db.transaction(scope, (tx) => app.services.db.rows<T>(tx, sql, bind));

beforeAll(async () => {
  await layDemo(app.services, async () => undefined);
  const [row] = await inScope<{ id: string }>(
    { kind: 'system' },
    "SELECT id FROM vessels WHERE name NOT LIKE '%Tamarisk%' ORDER BY name LIMIT 1",
  );
  world.mine = row?.id ?? '';
  // The one kind of row the demo fleet has none of.
  await app.services.db.transaction({ kind: 'system' }, (tx) =>
    app.services.db.run(
      tx,
      `INSERT INTO leaks(id, vessel_id, network_id, passphrase_id, kind, at)
       SELECT $id, p.vessel_id, p.network_id, p.id, 'reported', $now FROM passphrases p
       WHERE p.live_at IS NOT NULL AND p.retired_at IS NULL AND p.vessel_id <> $mine LIMIT 1`,
      { id: randomUUID(), now: app.clock.now(), mine: world.mine },
    ),
  );
  const tables = await all.asOwner<{ name: string }>(
    `SELECT c.relname AS name FROM pg_class c JOIN pg_namespace n ON n.oid = c.relnamespace AND n.nspname = 'public'
     JOIN pg_attribute a ON a.attrelid = c.oid AND a.attname = 'vessel_id' AND NOT a.attisdropped
     WHERE c.relkind IN ('r','p') AND c.relrowsecurity AND c.relforcerowsecurity ORDER BY 1`,
  );
  world.fenced = tables.map(({ name }) => name);
}, 120_000);

describe('R18: the database keeps vessels apart when the code forgets to (PostgreSQL manual 5.8)', () => {
  test('every table with a vessel in it is fenced, its owner included, or is known not to be', async () => {
    const open = await all.asOwner<{ name: string }>(
      `SELECT c.relname AS name FROM pg_class c JOIN pg_namespace n ON n.oid = c.relnamespace AND n.nspname = 'public'
       JOIN pg_attribute a ON a.attrelid = c.oid AND a.attname = 'vessel_id' AND NOT a.attisdropped
       WHERE c.relkind IN ('r','p') AND NOT (c.relrowsecurity AND c.relforcerowsecurity) ORDER BY 1`,
    );
    expect(open.map(({ name }) => name)).toEqual(Object.keys(UNFENCED).sort());
    expect(world.fenced.length).toBeGreaterThan(20);
    const vessels = await all.asOwner(
      "SELECT 1 FROM pg_class WHERE relname = 'vessels' AND relrowsecurity AND relforcerowsecurity",
    );
    expect(vessels).toHaveLength(1);
  });

  test('no table hangs from a fenced one without carrying the vessel itself', async () => {
    const loose = await all.asOwner<{ name: string; parent: string }>(
      `SELECT DISTINCT c.relname AS name, p.relname AS parent FROM pg_constraint k
       JOIN pg_class c ON c.oid = k.conrelid JOIN pg_class p ON p.oid = k.confrelid AND p.relforcerowsecurity
       WHERE k.contype = 'f' AND NOT EXISTS (SELECT 1 FROM pg_attribute a
         WHERE a.attrelid = c.oid AND a.attname = 'vessel_id' AND NOT a.attisdropped)`,
    );
    expect(loose).toEqual([]);
  });

  test('a select without any filter answers one vessel’s rows in her scope, and none where no scope is set', async () => {
    const seen: Record<string, unknown> = {};
    for (const table of world.fenced) {
      const count = (scope: Scope) =>
        inScope<{ mine: number; others: number }>(
          scope,
          `SELECT count(*) FILTER (WHERE vessel_id = $mine)::int AS mine,
                  count(*) FILTER (WHERE vessel_id <> $mine)::int AS others FROM ${table}`,
          { mine: world.mine },
        );
      const [[system], [vessel], [none], [dealer]] = await Promise.all([
        count({ kind: 'system' }),
        count({ kind: 'vessel', vesselId: world.mine }),
        count({ kind: 'none' }),
        count({ kind: 'fleet', dealerId: randomUUID() }),
      ]);
      seen[table] = [vessel?.others, vessel?.mine === system?.mine, none, dealer];
    }
    const nothing = { mine: 0, others: 0 };
    expect(seen).toEqual(
      Object.fromEntries(world.fenced.map((table) => [table, [0, true, nothing, nothing]])),
    );
  });

  test('the tables that were looked at held rows of others', async () => {
    const empty: string[] = [];
    for (const table of world.fenced) {
      const [row] = await inScope<{ others: number }>(
        { kind: 'system' },
        `SELECT count(*)::int AS others FROM ${table} WHERE vessel_id <> $mine`,
        { mine: world.mine },
      );
      if (row?.others === 0) empty.push(table);
    }
    // Written only by running changes and reports, which the demo fleet's history has none of.
    expect(
      empty.filter((table) => !['log_checkpoints', 'rotation_ways', 'observations'].includes(table)),
    ).toEqual([]);
  });

  test('another vessel’s rows can be neither changed nor removed nor added', async () => {
    const { db } = app.services;
    const scope: Scope = { kind: 'vessel', vesselId: world.mine };
    for (const table of ['cabins', 'guests', 'networks', 'passphrase_secrets', 'holders', 'parties']) {
      const changed = await db.transaction(scope, (tx) =>
        db.run(tx, `UPDATE ${table} SET vessel_id = vessel_id WHERE vessel_id <> $mine RETURNING 1`, {
          mine: world.mine,
        }),
      );
      expect(changed, table).toEqual([]);
    }
    const removed = await db.transaction(scope, (tx) =>
      db.run(tx, 'DELETE FROM cabins WHERE vessel_id <> $mine RETURNING 1', { mine: world.mine }),
    );
    expect(removed).toEqual([]);
    const [other] = await inScope<{ id: string }>(
      { kind: 'system' },
      'SELECT id FROM vessels WHERE id <> $mine',
      {
        mine: world.mine,
      },
    );
    const adding = db.transaction(scope, (tx) =>
      db.run(
        tx,
        "INSERT INTO cabins(id, vessel_id, deck, name) VALUES ($id, $other, 'Main deck', 'Theirs')",
        {
          id: randomUUID(),
          other: other?.id,
        },
      ),
    );
    await expect(adding).rejects.toMatchObject({ original: { code: '42501' } });
    const moving = db.transaction(scope, (tx) =>
      db.run(tx, 'UPDATE networks SET vessel_id = $other WHERE vessel_id = $mine', {
        other: other?.id,
        mine: world.mine,
      }),
    );
    await expect(moving).rejects.toMatchObject({ original: { code: '42501' } });
  });

  test('a dealer’s scope reads no secret, guest, name or log, and writes nothing', async () => {
    const [dealer] = await inScope<{ id: string }>({ kind: 'system' }, 'SELECT id FROM dealers LIMIT 1');
    const scope: Scope = { kind: 'fleet', dealerId: dealer?.id ?? '' };
    const readable: string[] = [];
    for (const table of world.fenced) {
      const [row] = await inScope<{ some: boolean }>(scope, `SELECT EXISTS (SELECT 1 FROM ${table}) AS some`);
      if (row?.some) readable.push(table);
    }
    expect(readable).toEqual([
      'holders',
      'leaks',
      'networks',
      'passphrases',
      'policies',
      'rotations',
      'ship_zones',
    ]);
    const { db } = app.services;
    const changed = await db.transaction(scope, (tx) =>
      db.run(tx, "UPDATE networks SET ssid = 'Theirs' RETURNING 1"),
    );
    expect(changed).toEqual([]);
  });
});

describe('R18: a connection carries nothing from one vessel to the next', () => {
  const SETTINGS = `SELECT coalesce(current_setting('quayword.vessel', true), '') AS vessel,
    coalesce(current_setting('quayword.scope', true), '') AS scope, coalesce(current_setting('quayword.dealer', true), '') AS dealer,
    (SELECT count(*)::int FROM networks) AS networks, pg_backend_pid() AS pid`;
  const CLEAN = { vessel: '', scope: '', dealer: '', networks: 0 };

  test.each([
    [
      'a commit',
      async (db: Database, scope: Scope) => void (await db.transaction(scope, async () => undefined)),
    ],
    [
      'an error',
      async (db: Database, scope: Scope) =>
        void (await db
          .transaction(scope, async () => Promise.reject(new Error('broken off')))
          .catch(() => undefined)),
    ],
    [
      'a failed statement',
      async (db: Database, scope: Scope) =>
        void (await db.transaction(scope, (tx) => db.run(tx, 'SELECT 1/0')).catch(() => undefined)),
    ],
  ])('after %s', async (_name, use) => {
    const db = new Database(app.appUrl, { poolMax: 1 });
    try {
      for (const scope of [
        { kind: 'vessel', vesselId: world.mine },
        { kind: 'fleet', dealerId: randomUUID() },
        { kind: 'system' },
      ] as const) {
        const before = await db.transaction({ kind: 'none' }, (tx) => db.row(tx, SETTINGS));
        await use(db, scope);
        const after = await db.transaction({ kind: 'none' }, (tx) => db.row(tx, SETTINGS));
        expect(after).toEqual({ ...CLEAN, pid: before?.pid });
      }
    } finally {
      await db.close();
    }
  });
});

describe('R18: the server’s own role', () => {
  test('owns nothing, passes no fence, and can make nothing', async () => {
    const [role] = await inScope(
      { kind: 'none' },
      `SELECT r.rolsuper, r.rolbypassrls, r.rolcreatedb, r.rolcreaterole, r.rolreplication,
         has_schema_privilege('public', 'CREATE') AS makes, has_database_privilege(current_database(), 'CREATE') AS schemas,
         (SELECT count(*)::int FROM pg_class WHERE relowner = r.oid) AS owns,
         (SELECT bool_or(rolsuper OR rolbypassrls) FROM pg_roles g WHERE pg_has_role(r.oid, g.oid, 'MEMBER')) AS stronger
       FROM pg_roles r WHERE r.rolname = current_user`,
    );
    expect(role).toEqual({
      rolsuper: false,
      rolbypassrls: false,
      rolcreatedb: false,
      rolcreaterole: false,
      rolreplication: false,
      makes: false,
      schemas: false,
      owns: 0,
      stronger: false,
    });
  });
});
