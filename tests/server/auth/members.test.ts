import { describe, expect, test } from 'vitest';
import { endRoles } from '../../../server/auth/members.ts';
import { useApp } from '../../support/app.ts';
import { Client } from '../../support/client.ts';
import { factories } from '../../support/factories.ts';
import { sql } from './browser.ts';

const app = useApp();
const make = factories(app);

async function aboard() {
  const vesselId = await make.vessel();
  await sql(app, "UPDATE vessels SET second_factor_roles = '{}' WHERE id = $id", { id: vesselId });
  const captain = await make.member(vesselId, 'captain', { name: 'Anneke Visser' });
  const stew = await make.member(vesselId, 'chief_stew', { name: 'Ilse Kramer' });
  return {
    vesselId,
    captain,
    stew,
    asCaptain: new Client(app, await make.session(captain.id)),
    asStew: new Client(app, await make.session(stew.id)),
  };
}
const log = (vesselId: string) =>
  sql<{ kind: string; body: { roles: string } }>(
    app,
    'SELECT kind, body FROM log_entries WHERE vessel_id = $vesselId ORDER BY seq',
    {
      vesselId,
    },
  );

describe('somebody whose roles have all ended', () => {
  test('is a departed holder of what they looked up, and the network is exposed', async () => {
    const { vesselId, stew, asCaptain, asStew } = await aboard();
    const network = await make.network(vesselId, {
      audience: 'guest',
      live: 'harbour-lantern-mooring-compass',
    });
    await asStew.post(`/vessels/${vesselId}/networks/${network.id}/reveal`).expect(200);
    await asCaptain
      .put(`/vessels/${vesselId}/members/${stew.id}`, { roles: [], suspended: false })
      .expect(204);
    const shown = await asCaptain.get(`/vessels/${vesselId}/networks/${network.id}`).expect(200);
    expect(shown.body).toMatchObject({ standing: 'exposed', holders: { current: 0, departed: 1 } });
  });
});

describe('roles on a vessel', () => {
  test('are given and ended by the captain, each with its line in the log, and count with the next request (R9)', async () => {
    const { vesselId, stew, asCaptain, asStew } = await aboard();
    const path = `/vessels/${vesselId}/members/${stew.id}`;
    expect((await asStew.get(`/vessels/${vesselId}/members`)).status).toBe(200);
    expect((await asCaptain.put(path, { roles: ['eto'], suspended: false })).status).toBe(204);
    expect((await asStew.get(`/vessels/${vesselId}/members`)).status).toBe(403);
    expect(
      (await asCaptain.put(path, { roles: ['chief_stew', 'purser', 'purser'], suspended: false })).status,
    ).toBe(204);
    expect((await asStew.get(`/vessels/${vesselId}/members`)).status).toBe(200);
    expect((await log(vesselId)).map(({ kind, body }) => [kind, body.roles])).toEqual([
      ['role.given', 'eto'],
      ['role.ended', 'chief_stew'],
      ['role.given', 'chief_stew,purser'],
      ['role.ended', 'eto'],
    ]);
    const told = await sql(
      app,
      "SELECT 1 FROM mail_outbox WHERE kind = 'role_given' AND recipient = $email",
      { email: stew.email },
    );
    expect(told).toHaveLength(2);
  });

  test('all ended, the vessel is not found any more and their other vessel still is', async () => {
    const { vesselId, stew, asCaptain, asStew } = await aboard();
    const other = await make.vessel({ name: 'Corvina' });
    await make.member(other, 'chief_stew', { personId: stew.id });
    expect(
      (await asCaptain.put(`/vessels/${vesselId}/members/${stew.id}`, { roles: [], suspended: false }))
        .status,
    ).toBe(204);
    expect((await asStew.get(`/vessels/${vesselId}/members`)).status).toBe(404);
    expect((await asStew.get(`/vessels/${other}/members`)).status).toBe(200);
    expect(
      (await asCaptain.put(`/vessels/${vesselId}/members/${stew.id}`, { roles: ['crew'], suspended: false }))
        .status,
    ).toBe(404);
  });

  test('R7: suspended, they reach nothing; lifted, they do; the log has both', async () => {
    const { vesselId, stew, asCaptain, asStew } = await aboard();
    const path = `/vessels/${vesselId}/members/${stew.id}`;
    await asCaptain.put(path, { roles: ['chief_stew'], suspended: true });
    expect((await asStew.get(`/vessels/${vesselId}/members`)).status).toBe(404);
    const listed = (await asCaptain.get(`/vessels/${vesselId}/members`)).body.members as {
      personId: string;
      suspended: boolean;
    }[];
    expect(listed.find((member) => member.personId === stew.id)?.suspended).toBe(true);
    await asCaptain.put(path, { roles: ['chief_stew'], suspended: true });
    await asCaptain.put(path, { roles: ['chief_stew'], suspended: false });
    expect((await asStew.get(`/vessels/${vesselId}/members`)).status).toBe(200);
    expect((await log(vesselId)).map(({ kind }) => kind)).toEqual(['role.ended', 'role.given']);
  });

  test('the last captain stays: neither ended, nor suspended, nor signed off; with a second one they may go', async () => {
    const { vesselId, captain, stew, asCaptain } = await aboard();
    const path = `/vessels/${vesselId}/members/${captain.id}`;
    for (const change of [
      { roles: [], suspended: false },
      { roles: ['eto'], suspended: false },
      { roles: ['captain'], suspended: true },
    ]) {
      const answer = await asCaptain.put(path, change);
      expect([answer.status, answer.body.code]).toEqual([409, 'not_now']);
    }
    const by = { id: stew.id, name: stew.name };
    const signOff = () =>
      app.services.db.transaction({ kind: 'vessel', vesselId }, (tx) =>
        endRoles(app.services, tx, { personId: captain.id, vesselId, by }),
      );
    await expect(signOff()).rejects.toMatchObject({ code: 'not_now' });
    expect((await asCaptain.get(`/vessels/${vesselId}/members`)).status).toBe(200);
    expect(await log(vesselId)).toEqual([]);

    await make.member(vesselId, 'captain');
    await signOff();
    expect((await asCaptain.get(`/vessels/${vesselId}/members`)).status).toBe(404);
    expect((await log(vesselId)).map(({ kind, body }) => [kind, body.roles])).toEqual([
      ['role.ended', 'captain'],
    ]);
    await signOff();
    expect(await log(vesselId)).toHaveLength(1);
  });

  test('two captains who end each other at one moment leave one', async () => {
    const { vesselId, captain, asCaptain } = await aboard();
    const second = await make.member(vesselId, 'captain');
    const asSecond = new Client(app, await make.session(second.id));
    const answers = await Promise.all([
      asCaptain.put(`/vessels/${vesselId}/members/${second.id}`, { roles: [], suspended: false }),
      asSecond.put(`/vessels/${vesselId}/members/${captain.id}`, { roles: [], suspended: false }),
    ]);
    expect(answers.filter((answer) => answer.status === 204)).toHaveLength(1);
    const left = await sql(
      app,
      "SELECT 1 FROM memberships WHERE vessel_id = $vesselId AND role = 'captain' AND ended_at IS NULL",
      { vesselId },
    );
    expect(left).toHaveLength(1);
  });

  test('ending a captain voids what they had invited', async () => {
    const { vesselId, captain, asCaptain } = await aboard();
    const second = await make.member(vesselId, 'captain');
    const asSecond = new Client(app, await make.session(second.id));
    await asCaptain.post(`/vessels/${vesselId}/invitations`, {
      email: 'one@crew.example',
      roles: ['captain'],
    });
    await asSecond.post(`/vessels/${vesselId}/invitations`, { email: 'two@crew.example', roles: ['crew'] });
    await asSecond.put(`/vessels/${vesselId}/members/${captain.id}`, { roles: ['crew'], suspended: false });
    const open = (await asSecond.get(`/vessels/${vesselId}/members`)).body.invitations as { email: string }[];
    expect(open.map(({ email }) => email)).toEqual(['two@crew.example']);
  });

  test('R13: ask for a fresh proof', async () => {
    const { vesselId, captain, stew } = await aboard();
    const client = new Client(app, await make.session(captain.id));
    app.clock.advance(11 * 60_000);
    const stale = await client.put(`/vessels/${vesselId}/members/${stew.id}`, {
      roles: ['eto'],
      suspended: false,
    });
    expect([stale.status, stale.body.code]).toEqual([403, 'step_up']);
    expect((await client.get(`/vessels/${vesselId}/members`)).status).toBe(200);
  });

  test('R15: another vessel’s captain finds nobody here', async () => {
    const { vesselId, stew } = await aboard();
    const other = await aboard();
    const change = { roles: ['eto'], suspended: false };
    expect((await other.asCaptain.put(`/vessels/${vesselId}/members/${stew.id}`, change)).status).toBe(404);
    expect((await other.asCaptain.put(`/vessels/${other.vesselId}/members/${stew.id}`, change)).status).toBe(
      404,
    );
    expect(
      (await other.asCaptain.put(`/vessels/${other.vesselId}/members/${other.stew.id}`, change)).status,
    ).toBe(204);
  });
});
