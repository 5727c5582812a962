import { describe, expect, test } from 'vitest';
import { useApp } from '../support/app.ts';
import { anonymousClient, Client } from '../support/client.ts';
import { factories } from '../support/factories.ts';

const app = useApp();
const make = factories(app);

describe('a session', () => {
  test('tells its person who they are, and nobody else', async () => {
    const vesselId = await make.vessel({ name: 'Tamarisk' });
    const purser = await make.member(vesselId, 'purser');
    const client = new Client(app, await make.session(purser.id));
    const answer = await client.get('/session').expect(200);
    expect(answer.body.memberships).toEqual([{ vesselId, vesselName: 'Tamarisk', roles: ['purser'] }]);
    expect(answer.body.dealer).toBeNull();
    await anonymousClient(app).get('/session').expect(401);
  });

  test('R9: ends when it has been idle for half an hour, or after twelve hours whatever happens', async () => {
    const vesselId = await make.vessel();
    const purser = await make.member(vesselId, 'purser');
    const client = new Client(app, await make.session(purser.id));
    app.clock.advance(29 * 60_000);
    await client.get('/session').expect(200);
    app.clock.advance(31 * 60_000);
    await client.get('/session').expect(401);

    const busy = new Client(app, await make.session(purser.id));
    for (let minutes = 0; minutes < 12 * 60; minutes += 20) {
      app.clock.advance(20 * 60_000);
      await busy.get('/session').expect(minutes + 20 < 12 * 60 ? 200 : 401);
    }
  });
});
