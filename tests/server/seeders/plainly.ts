import { createHash } from 'node:crypto';
import canonicalize from 'canonicalize';
import type { TestApp } from '../../support/app.ts';

/** What the demo's tests compare with, worked out the long way and sharing nothing with the server's. */

const system = <T extends object>(app: TestApp, sql: string) =>
  app.services.db.transaction({ kind: 'system' }, (tx) => app.services.db.rows<T>(tx, sql));

/** The date at Split, by the browser's own calendar. */
export const shipDate = (at: Date): string =>
  new Intl.DateTimeFormat('en-CA', { timeZone: 'Europe/Zagreb', dateStyle: 'short' }).format(at);

/** The fleet's figures by a loop over every row of every table concerned. */
export async function plainFigures(app: TestApp, now: Date) {
  const vessels = await system<{ id: string }>(app, 'SELECT id FROM vessels');
  const networks = await system<{ id: string }>(app, 'SELECT id FROM networks WHERE removed_at IS NULL');
  const policies = await system<{ network_id: string; age_limit_days: number }>(
    app,
    'SELECT * FROM policies',
  );
  const passphrases = await system<{
    id: string;
    network_id: string;
    live_at: Date | null;
    retired_at: Date | null;
  }>(app, 'SELECT * FROM passphrases');
  const holders = await system<{ passphrase_id: string; departed_at: Date | null }>(
    app,
    'SELECT * FROM holders',
  );
  const leaks = await system<{ passphrase_id: string; withdrawn_at: Date | null }>(
    app,
    'SELECT * FROM leaks',
  );
  const figures = {
    vessels: vessels.length,
    networks: networks.length,
    ageUnknown: 0,
    pastLimit: 0,
    pastLimitExposed: 0,
    heldByDeparted: 0,
    exposed: 0,
  };
  for (const network of networks) {
    const live = passphrases.find((one) => one.network_id === network.id && one.live_at && !one.retired_at);
    const limit = policies.find((policy) => policy.network_id === network.id);
    if (!live?.live_at || !limit) {
      figures.ageUnknown += 1;
      continue;
    }
    const past = now.getTime() - live.live_at.getTime() > limit.age_limit_days * 24 * 3_600_000;
    const departed = holders.some((holder) => holder.passphrase_id === live.id && holder.departed_at);
    const leaked = leaks.some((leak) => leak.passphrase_id === live.id && !leak.withdrawn_at);
    if (past) figures.pastLimit += 1;
    if (past && departed) figures.pastLimitExposed += 1;
    if (departed) figures.heldByDeparted += 1;
    if (departed || leaked) figures.exposed += 1;
  }
  return figures;
}

interface EntryRow {
  id: string;
  vessel_id: string;
  seq: string;
  at: Date;
  kind: string;
  network_id: string | null;
  passphrase_id: string | null;
  subject_kind: string | null;
  subject_id: string | null;
  actor_id: string | null;
  body: object;
  prev_hash: Buffer;
  hash: Buffer;
}

/** Entries that do not follow from the one before, and heads that do not name the last (R46–R48). */
export async function brokenChains(app: TestApp): Promise<{ entries: number; broken: string[] }> {
  const entries = await system<EntryRow>(app, 'SELECT * FROM log_entries ORDER BY vessel_id, seq');
  const heads = await system<{ vessel_id: string; seq: string; hash: Buffer }>(
    app,
    'SELECT * FROM log_heads',
  );
  const last = new Map<string, { seq: number; hash: Buffer }>();
  const broken: string[] = [];
  for (const entry of entries) {
    const before = last.get(entry.vessel_id) ?? {
      seq: 0,
      hash: createHash('sha256').update('Quayword log').digest(),
    };
    const text = canonicalize({
      id: entry.id,
      vesselId: entry.vessel_id,
      seq: Number(entry.seq),
      at: entry.at.toISOString(),
      kind: entry.kind,
      networkId: entry.network_id,
      passphraseId: entry.passphrase_id,
      subjectKind: entry.subject_kind,
      subjectId: entry.subject_id,
      actorId: entry.actor_id,
      body: entry.body,
    });
    const hash = createHash('sha256')
      .update(before.hash)
      .update(text ?? '')
      .digest();
    const follows =
      Number(entry.seq) === before.seq + 1 && entry.prev_hash.equals(before.hash) && entry.hash.equals(hash);
    if (!follows) broken.push(`${entry.vessel_id} ${entry.seq}`);
    last.set(entry.vessel_id, { seq: Number(entry.seq), hash: entry.hash });
  }
  for (const head of heads) {
    const end = last.get(head.vessel_id);
    if (end && (Number(head.seq) !== end.seq || !head.hash.equals(end.hash)))
      broken.push(`head ${head.vessel_id}`);
  }
  return { entries: entries.length, broken };
}
