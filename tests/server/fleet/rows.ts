import { randomUUID } from 'node:crypto';
import { appendLog } from '../../../server/handovers/appendLog.ts';
import type { RotationState } from '../../../shared/api/common.ts';
import type { Audience } from '../../../shared/rules/permissions.ts';
import type { TestApp } from '../../support/app.ts';

/** A vessel with its networks, as the fleet's tests lay it. */
export interface Aboard {
  readonly id: string;
  readonly networks: Partial<Record<Audience, { id: string; passphraseId: string | null }>>;
}

function of(boat: Aboard, audience: Audience) {
  const network = boat.networks[audience];
  if (!network?.passphraseId) throw new Error(`The boat has no ${audience} network with a passphrase`);
  return { networkId: network.id, passphraseId: network.passphraseId };
}

const run = (test: TestApp, sql: string, bind: Record<string, unknown>) =>
  test.services.db.transaction({ kind: 'system' }, (tx) => test.services.db.run(tx, sql, bind));

export async function holder(
  test: TestApp,
  boat: Aboard,
  audience: Audience,
  given: { departed?: Date },
): Promise<void> {
  const { networkId, passphraseId } = of(boat, audience);
  await run(
    test,
    `INSERT INTO holders(passphrase_id, holder_kind, holder_id, vessel_id, network_id, since, through, departed_at)
     VALUES ($passphrase, 'crew', $id, $vessel, $network, $now, 'card', $departed)`,
    {
      passphrase: passphraseId,
      id: randomUUID(),
      vessel: boat.id,
      network: networkId,
      now: test.clock.now(),
      departed: given.departed ?? null,
    },
  );
}

/** A reported leak of the live passphrase; answers how to withdraw it. */
export async function leak(test: TestApp, boat: Aboard, audience: Audience): Promise<() => Promise<void>> {
  const { networkId, passphraseId } = of(boat, audience);
  const id = randomUUID();
  await run(
    test,
    `INSERT INTO leaks(id, vessel_id, network_id, passphrase_id, kind, at)
     VALUES ($id, $vessel, $network, $passphrase, 'reported', $now)`,
    { id, vessel: boat.id, network: networkId, passphrase: passphraseId, now: test.clock.now() },
  );
  return async () => {
    await run(test, 'UPDATE leaks SET withdrawn_at = $now WHERE id = $id', { id, now: test.clock.now() });
  };
}

export async function rotation(
  test: TestApp,
  boat: Aboard,
  audience: Audience,
  given: { state: RotationState; due?: Date; deadline?: Date; live?: Date; reasons?: object[] },
): Promise<void> {
  const { networkId, passphraseId } = of(boat, audience);
  await run(
    test,
    `INSERT INTO rotations(id, vessel_id, network_id, state, driver, epoch, to_passphrase_id, planned_by, reasons,
       due_at, deadline_at, live_at, created_at, updated_at)
     VALUES ($id, $vessel, $network, $state, 'rehearsal', 1, $to, 'plan', $reasons::jsonb, $due, $deadline, $live, $now, $now)`,
    {
      id: randomUUID(),
      vessel: boat.id,
      network: networkId,
      state: given.state,
      to: given.state === 'planned' || given.state === 'cancelled' ? null : passphraseId,
      reasons: JSON.stringify(given.reasons ?? []),
      due: given.due ?? test.clock.now(),
      deadline: given.deadline ?? null,
      live: given.live ?? null,
      now: test.clock.now(),
    },
  );
}

/** Fills what no dealer may read on this vessel; answers those tables. */
export async function filled(test: TestApp, boat: Aboard): Promise<string[]> {
  const { services } = test;
  const now = test.clock.now();
  const bind = { vessel: boat.id, now, later: new Date(now.getTime() + 86_400_000), id: randomUUID() };
  const rows: Record<string, string> = {
    voyages: `(id, vessel_id, kind, title, starts_at, ends_at, created_at, updated_at)
      VALUES ($id, $vessel, 'charter', 'Brandvold charter', $now, $later, $now, $now)`,
    parties: `(id, vessel_id, name, arrives_at, leaves_at, created_at, updated_at)
      VALUES ($id, $vessel, 'Brandvold', $now, $later, $now, $now)`,
    guests: `(id, vessel_id, name, label, from_at, until_at, created_at, updated_at)
      VALUES ($id, $vessel, 'Sigrun Brandvold', 'Guest 1', $now, $later, $now, $now)`,
    crew_members: `(id, vessel_id, name, position, signed_on_at, created_at, updated_at)
      VALUES ($id, $vessel, 'Kaito Ferreira', 'Deckhand', $now, $now, $now)`,
    access_points: `(id, vessel_id, name) VALUES ($id, $vessel, 'Main saloon')`,
  };
  for (const [table, values] of Object.entries(rows)) {
    const { later, ...few } = bind;
    const { now: _now, ...fewest } = few;
    const given = values.includes('$later') ? bind : values.includes('$now') ? few : fewest;
    await run(test, `INSERT INTO ${table}${values}`, given);
  }
  await services.db.transaction({ kind: 'system' }, (tx) =>
    appendLog(services, tx, [
      {
        vesselId: boat.id,
        kind: 'crew.signed_on',
        at: now,
        subject: { kind: 'crew', id: bind.id, name: 'Kaito Ferreira' },
      },
    ]),
  );
  return [...Object.keys(rows), 'passphrase_secrets', 'log_entries', 'log_names'];
}
