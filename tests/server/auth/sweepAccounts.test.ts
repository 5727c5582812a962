import { expect, test } from 'vitest';
import { sweepAccounts } from '../../../server/auth/sweepAccounts.ts';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';
import { Browser, setPassword, sql } from './browser.ts';

const app = useApp();
const make = factories(app);
const PASSWORD = 'fog signal every minute';
const DAY = 86_400_000;

const count = async (table: string) => (await sql(app, `SELECT 1 FROM ${table}`)).length;

test('what can open nothing any more is cleared away, and nothing that still counts', async () => {
  const person = await make.person();
  await setPassword(app, person.id, PASSWORD);
  const browser = new Browser(app);
  await browser.signIn(person.email, PASSWORD);
  await new Browser(app).signIn(person.email, 'a wrong guess');
  await browser.post('/password-resets', { email: person.email });
  expect(await sweepAccounts(app.services)).toBe(0);
  expect((await browser.get('/session')).status).toBe(200);

  app.clock.advance(31 * DAY);
  await sweepAccounts(app.services);
  for (const table of ['sessions', 'password_resets', 'throttles']) expect(await count(table), table).toBe(0);
  expect(await count('known_devices')).toBe(1);
  expect((await browser.laterVisit().signIn(person.email, PASSWORD)).status).toBe(200);

  app.clock.advance(179 * DAY);
  await sweepAccounts(app.services);
  expect(await count('known_devices')).toBe(1);
  app.clock.advance(2 * DAY);
  expect(await sweepAccounts(app.services)).toBeGreaterThan(0);
  expect(await count('known_devices')).toBe(0);
});
