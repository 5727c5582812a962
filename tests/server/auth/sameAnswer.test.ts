import argon2 from 'argon2';
import { describe, expect, test, vi } from 'vitest';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';
import { Browser, setPassword, sql } from './browser.ts';

const app = useApp();
const make = factories(app);
const PASSWORD = 'salt on the wheelhouse glass';

const median = (numbers: readonly number[]): number =>
  [...numbers].sort((a, b) => a - b)[Math.floor(numbers.length / 2)] ?? 0;

async function cast() {
  const known = await make.person();
  const disabled = await make.person();
  for (const person of [known, disabled]) await setPassword(app, person.id, PASSWORD);
  const invitedOnly = await make.person();
  await sql(app, 'UPDATE people SET disabled_at = $now WHERE id = $id', {
    id: disabled.id,
    now: app.clock.now(),
  });
  return {
    known: [known.email, 'not the password'],
    disabled: [disabled.email, PASSWORD],
    'without a password': [invitedOnly.email, PASSWORD],
    unknown: ['nobody@else.example', PASSWORD],
  } as const;
}

describe('R4: a sign-in that fails', () => {
  test('answers the same to the octet, whoever does not exist', async () => {
    const shapes = [];
    let host = 0;
    for (const [email, password] of Object.values(await cast())) {
      host += 1;
      const answer = await new Browser(app, { address: `127.0.40.${host}` }).signIn(email, password);
      const { 'x-request-id': _one, date: _two, ...headers } = answer.headers as Record<string, string>;
      shapes.push({ status: answer.status, headers, text: answer.text.replace(/"requestId":"[^"]*"/, '') });
    }
    expect(shapes[0]?.status).toBe(401);
    for (const shape of shapes) expect(shape).toEqual(shapes[0]);
  });

  test('computes one hash of the same size whoever does not exist', async () => {
    const verify = vi.spyOn(argon2, 'verify');
    let host = 0;
    for (const [email, password] of Object.values(await cast())) {
      host += 1;
      verify.mockClear();
      await new Browser(app, { address: `127.0.41.${host}` }).signIn(email, password);
      expect(verify).toHaveBeenCalledTimes(1);
      const [hash] = verify.mock.calls[0] ?? [];
      expect(hash).toMatch(/^\$argon2id\$v=19\$m=19456,p=1,t=2\$|^\$argon2id\$v=19\$m=19456,t=2,p=1\$/);
    }
    verify.mockRestore();
  });

  test('takes the same time: medians of turns taken one after the other', async () => {
    const people = await cast();
    const times = { known: [] as number[], unknown: [] as number[], disabled: [] as number[] };
    for (let round = 0; round < 25; round += 1) {
      for (const who of ['known', 'unknown', 'disabled'] as const) {
        const [email, password] = people[who];
        // Throttles would answer sooner; they are their own test.
        await sql(app, 'DELETE FROM throttles');
        const browser = new Browser(app);
        const began = performance.now();
        expect((await browser.signIn(email, password)).status).toBe(401);
        times[who].push(performance.now() - began);
      }
    }
    const middle = {
      known: median(times.known),
      unknown: median(times.unknown),
      disabled: median(times.disabled),
    };
    console.info(
      `medians of 25: known ${middle.known.toFixed(1)} ms, unknown ${middle.unknown.toFixed(1)} ms, disabled ${middle.disabled.toFixed(1)} ms`,
    );
    // Without the made-up hash an unknown address would cost a fraction; other work on the machine blurs the rest.
    for (const other of [middle.unknown, middle.disabled]) {
      expect(other / middle.known).toBeGreaterThan(0.75);
      expect(other / middle.known).toBeLessThan(1.33);
    }
  }, 90_000);
});
