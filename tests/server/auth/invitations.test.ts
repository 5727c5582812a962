import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { VesselRole } from '../../../shared/rules/permissions.ts';
import { useApp } from '../../support/app.ts';
import { Client } from '../../support/client.ts';
import { factories } from '../../support/factories.ts';
import { type MailServer, startMailServer } from '../mail/mailServer.ts';
import { deliver, tokenOf } from '../mail/outbox.ts';
import { Browser, setPassword, sql } from './browser.ts';

const app = useApp();
const make = factories(app);
const PASSWORD = 'heron by the lock gate';
const holder: { server?: MailServer } = {};
const mails = () => {
  if (!holder.server) throw new Error('no mail server yet');
  return deliver(app, holder.server);
};
beforeAll(async () => {
  holder.server = await startMailServer();
});
afterAll(() => holder.server?.close());

let number = 0;
async function aboard() {
  number += 1;
  const vesselId = await make.vessel({ name: `Tamarisk ${number}` });
  await sql(app, "UPDATE vessels SET second_factor_roles = '{}' WHERE id = $id", { id: vesselId });
  const captain = await make.member(vesselId, 'captain', { name: 'Anneke Visser' });
  const client = new Client(app, await make.session(captain.id));
  return { vesselId, captain, client, email: `new${number}@crew.example` };
}

async function invited(roles: readonly VesselRole[] = ['purser']) {
  const { vesselId, captain, client, email } = await aboard();
  const answer = await client.post(`/vessels/${vesselId}/invitations`, { email, name: 'Ilse', roles });
  expect(answer.status).toBe(201);
  const [mail] = await mails();
  return { vesselId, captain, client, email, id: answer.body.id as string, mail, token: tokenOf(mail) };
}

const accept = (token: string, given: object = { name: 'Ilse Kramer', password: PASSWORD }) =>
  new Browser(app).post('/invitations/accept', { token, ...given });
const rolesOf = async (vesselId: string, email: string) =>
  (
    await sql<{ role: string }>(
      app,
      'SELECT m.role FROM memberships m JOIN people p ON p.id = m.person_id WHERE m.vessel_id = $vesselId AND p.email = $email AND m.ended_at IS NULL ORDER BY m.role',
      { vesselId, email },
    )
  ).map(({ role }) => role);
const entries = (vesselId: string) =>
  sql<{ kind: string }>(app, 'SELECT kind FROM log_entries WHERE vessel_id = $vesselId ORDER BY seq', {
    vesselId,
  });

describe('R6: an invitation', () => {
  test('brings somebody new aboard with each role, once, with one line in the log for each step', async () => {
    const { vesselId, email, token, mail } = await invited(['purser', 'chief_stew']);
    expect(mail?.to).toEqual([email]);
    expect(mail?.parsed.text).toContain('Anneke Visser');
    const read = await new Browser(app).post('/invitations/read', { token });
    expect(read.body).toMatchObject({
      email,
      place: `Tamarisk ${number}`,
      roles: ['purser', 'chief_stew'],
      known: false,
    });

    const browser = new Browser(app);
    expect(
      (await browser.post('/invitations/accept', { token, name: 'Ilse Kramer', password: PASSWORD })).status,
    ).toBe(201);
    expect(browser.signedIn).toBe(false);
    expect(await rolesOf(vesselId, email)).toEqual(['chief_stew', 'purser']);
    expect((await browser.signIn(email, PASSWORD)).status).toBe(200);
    expect((await browser.get(`/vessels/${vesselId}/members`)).status).toBe(200);
    expect((await entries(vesselId)).map(({ kind }) => kind)).toEqual(['invitation.sent', 'role.given']);
    expect((await accept(token)).status).toBe(410);
  });

  test('accepted fifty times at one moment makes one account, one membership a role and one entry', async () => {
    const { vesselId, email, token } = await invited();
    const answers = await Promise.all(Array.from({ length: 50 }, () => accept(token)));
    expect(answers.filter((answer) => answer.status === 201)).toHaveLength(1);
    for (const answer of answers) expect([201, 409, 410, 503]).toContain(answer.status);
    expect(await rolesOf(vesselId, email)).toEqual(['purser']);
    expect(await sql(app, 'SELECT 1 FROM people WHERE email = $email', { email })).toHaveLength(1);
    expect((await entries(vesselId)).filter(({ kind }) => kind === 'role.given')).toHaveLength(1);
  });

  test('works for 72 hours and not a second longer', async () => {
    const early = await invited();
    const late = await invited();
    app.clock.advance(72 * 3_600_000 - 1_000);
    expect((await accept(early.token)).status).toBe(201);
    app.clock.advance(2_000);
    expect((await new Browser(app).post('/invitations/read', { token: late.token })).status).toBe(410);
    expect((await accept(late.token)).status).toBe(410);
    expect(await rolesOf(late.vesselId, late.email)).toEqual([]);
  });

  test('reading it, as a mail scanner may, uses nothing up', async () => {
    const { token } = await invited();
    for (let times = 0; times < 3; times += 1) {
      expect((await new Browser(app).post('/invitations/read', { token })).status).toBe(200);
    }
    expect((await accept(token)).status).toBe(201);
  });

  test('withdrawn, it is worth nothing; another vessel’s captain cannot withdraw it', async () => {
    const { vesselId, client, id, token } = await invited();
    const other = await aboard();
    expect((await other.client.delete(`/vessels/${other.vesselId}/invitations/${id}`)).status).toBe(404);
    expect((await client.get(`/vessels/${vesselId}/members`)).body.invitations).toHaveLength(1);
    expect((await client.delete(`/vessels/${vesselId}/invitations/${id}`)).status).toBe(204);
    expect((await client.get(`/vessels/${vesselId}/members`)).body.invitations).toEqual([]);
    expect((await client.delete(`/vessels/${vesselId}/invitations/${id}`)).status).toBe(404);
    expect((await accept(token)).status).toBe(410);
  });

  test('a second one to the same address replaces the first', async () => {
    const { vesselId, client, email, token } = await invited(['purser']);
    await client.post(`/vessels/${vesselId}/invitations`, { email, roles: ['crew'] });
    const [mail] = await mails();
    expect((await accept(token)).status).toBe(410);
    expect((await accept(tokenOf(mail))).status).toBe(201);
    expect(await rolesOf(vesselId, email)).toEqual(['crew']);
  });

  test.each([
    ['was ended', 'UPDATE memberships SET ended_at = $now WHERE person_id = $id'],
    ['is suspended', 'UPDATE memberships SET suspended_at = $now WHERE person_id = $id'],
    [
      'became another',
      "UPDATE memberships SET role = 'chief_stew' WHERE person_id = $id AND $now::timestamptz IS NOT NULL",
    ],
    [
      'has run out',
      "UPDATE memberships SET ends_at = $now::timestamptz - interval '1 second' WHERE person_id = $id",
    ],
  ])('is worth nothing once the inviter’s role %s; and works while it stands', async (_what, change) => {
    const { captain, token, vesselId, email } = await invited();
    await sql(app, change, { id: captain.id, now: app.clock.now() });
    expect((await accept(token)).status).toBe(410);
    expect(await rolesOf(vesselId, email)).toEqual([]);
    await sql(
      app,
      "UPDATE memberships SET ended_at = NULL, suspended_at = NULL, ends_at = NULL, role = 'captain' WHERE person_id = $id",
      {
        id: captain.id,
      },
    );
    expect((await accept(token)).status).toBe(201);
  });

  test('names every field that is missing or wrong, and is not used up by it', async () => {
    const { token, vesselId } = await invited();
    const nothing = await accept(token, {});
    expect(Object.keys(nothing.body.errors).sort()).toEqual(['name', 'password']);
    expect((await accept(token, { name: 'Ilse', password: 'short' })).status).toBe(422);
    expect((await accept(token, { name: 'Ilse', password: 'password' })).status).toBe(422);
    const vessel = await sql<{ name: string }>(app, 'SELECT name FROM vessels WHERE id = $vesselId', {
      vesselId,
    });
    expect((await accept(token, { name: 'Ilse', password: vessel[0]?.name })).status).toBe(422);
    expect((await accept(token, { name: 'A\nB', password: PASSWORD })).status).toBe(422);
    expect((await accept(token)).status).toBe(201);
  });

  test('of somebody known asks for their own password, and changes neither it nor their name', async () => {
    const { vesselId, client } = await aboard();
    const person = await make.person({ name: 'Joris Bakker' });
    await setPassword(app, person.id, PASSWORD);
    await client.post(`/vessels/${vesselId}/invitations`, { email: person.email, roles: ['eto'] });
    const token = tokenOf((await mails())[0]);
    expect((await new Browser(app).post('/invitations/read', { token })).body.known).toBe(true);
    expect((await accept(token, {})).status).toBe(422);
    const wrong = await accept(token, { password: 'not their password' });
    expect(wrong.status).toBe(422);
    expect(wrong.body.errors.password).toBeDefined();
    expect(await rolesOf(vesselId, person.email)).toEqual([]);
    expect((await accept(token, { name: 'Somebody Else', password: PASSWORD })).status).toBe(201);
    expect(await rolesOf(vesselId, person.email)).toEqual(['eto']);
    const browser = new Browser(app);
    expect((await browser.signIn(person.email, PASSWORD)).status).toBe(200);
    expect((await browser.get('/session')).body.person.name).toBe('Joris Bakker');
  });

  test('gives a role again that ran out by its own date', async () => {
    const { vesselId, client } = await aboard();
    const person = await make.member(vesselId, 'purser');
    await setPassword(app, person.id, PASSWORD);
    await sql(
      app,
      "UPDATE memberships SET ends_at = $now::timestamptz - interval '1 day' WHERE person_id = $id",
      {
        id: person.id,
        now: app.clock.now(),
      },
    );
    const browser = new Browser(app);
    await browser.signIn(person.email, PASSWORD);
    expect((await browser.get(`/vessels/${vesselId}/members`)).status).toBe(404);
    await client.post(`/vessels/${vesselId}/invitations`, { email: person.email, roles: ['chief_stew'] });
    await accept(tokenOf((await mails())[0]), { password: PASSWORD });
    expect((await browser.get(`/vessels/${vesselId}/members`)).status).toBe(200);
  });

  test('does not lift a suspension', async () => {
    const { vesselId, client } = await aboard();
    const person = await make.member(vesselId, 'chief_stew');
    await setPassword(app, person.id, PASSWORD);
    await sql(app, 'UPDATE memberships SET suspended_at = $now WHERE person_id = $id', {
      id: person.id,
      now: app.clock.now(),
    });
    await client.post(`/vessels/${vesselId}/invitations`, { email: person.email, roles: ['chief_stew'] });
    await accept(tokenOf((await mails())[0]), { password: PASSWORD });
    const browser = new Browser(app);
    await browser.signIn(person.email, PASSWORD);
    expect((await browser.get(`/vessels/${vesselId}/members`)).status).toBe(404);
  });
});

describe('sending one', () => {
  test('R13: asks for a fresh proof', async () => {
    const { vesselId, captain, email } = await aboard();
    const client = new Client(app, await make.session(captain.id));
    app.clock.advance(11 * 60_000);
    const stale = await client.post(`/vessels/${vesselId}/invitations`, { email, roles: ['crew'] });
    expect([stale.status, stale.body.code]).toEqual([403, 'step_up']);
    const fresh = new Client(app, await make.session(captain.id));
    expect((await fresh.post(`/vessels/${vesselId}/invitations`, { email, roles: ['crew'] })).status).toBe(
      201,
    );
    await mails();
  });

  test('R7: somebody only invited can reach nothing of the vessel', async () => {
    const { vesselId, email, token } = await invited();
    expect((await new Browser(app).get(`/vessels/${vesselId}/members`)).status).toBe(401);
    expect((await new Browser(app).signIn(email, PASSWORD)).status).toBe(401);
    await accept(token);
    const browser = new Browser(app);
    expect((await browser.signIn(email, PASSWORD)).status).toBe(200);
    expect((await browser.get('/session')).body.memberships).toEqual([
      expect.objectContaining({ vesselId, roles: ['purser'] }),
    ]);
  });

  test.each([
    'a@crew.example\r\nBcc: b@else.example',
    'a@crew.example,b@else.example',
    '"b@else.example a"@crew.example',
    'Ilse <a@crew.example>',
    'a@cr\u0435w.example',
    `${'a'.repeat(65)}@crew.example`,
    `a@${'b'.repeat(250)}.example`,
  ])('R43: %j is not one mailbox', async (email) => {
    const { vesselId, client } = await aboard();
    const answer = await client.post(`/vessels/${vesselId}/invitations`, { email, roles: ['crew'] });
    expect(answer.status).toBe(422);
    expect(answer.body.errors.email).toBeDefined();
    expect(await mails()).toEqual([]);
  });

  test('tells what became of its mail', async () => {
    const { vesselId, client, email } = await aboard();
    const state = async () => (await client.get(`/vessels/${vesselId}/members`)).body.invitations[0].mail;
    await client.post(`/vessels/${vesselId}/invitations`, { email, roles: ['crew'] });
    expect(await state()).toBe('waiting');
    await sql(app, 'UPDATE mail_outbox SET given_up_at = $now WHERE recipient = $email', {
      email,
      now: app.clock.now(),
    });
    expect(await state()).toBe('not_delivered');
    await sql(app, 'UPDATE mail_outbox SET given_up_at = NULL WHERE recipient = $email', { email });
    await mails();
    expect(await state()).toBe('sent');
  });
});
