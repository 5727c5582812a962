import { describe, expect, test } from 'vitest';
import { aboard } from '../../support/aboard.ts';
import { useApp } from '../../support/app.ts';
import { anonymousClient, Client } from '../../support/client.ts';

const app = useApp();
const { make, as, look, logged } = aboard(app);

const PETREL = {
  name: 'Petrel Hollow',
  kind: 'motor yacht',
  homePort: 'Bar',
  zone: 'Europe/Podgorica',
  captain: { name: 'Idris Calloway', email: 'idris@petrel.example' },
};

async function desk() {
  const dealerId = await make.dealer();
  const person = await make.dealerMember(dealerId);
  return { dealerId, client: new Client(app, await make.session(person.id)) };
}

describe('a dealer adds a vessel', () => {
  test('she is in the fleet, and her captain alone is invited', async () => {
    const { dealerId, client } = await desk();
    const added = await client.post('/fleet/vessels', PETREL).expect(201);
    expect(added.body).toEqual({
      vesselId: expect.any(String),
      name: 'Petrel Hollow',
      invited: 'idris@petrel.example',
    });
    const { vesselId } = added.body;
    const fleet = await client.get(`/fleet/vessels/${vesselId}`).expect(200);
    expect(fleet.text).toContain('Petrel Hollow');
    expect(
      await look('SELECT dealer_id, driver, serial_prefix FROM vessels WHERE id = $id', { id: vesselId }),
    ).toEqual([{ dealer_id: dealerId, driver: 'by_hand', serial_prefix: 'P' }]);
    expect(
      await look('SELECT email, roles FROM invitations WHERE vessel_id = $id', { id: vesselId }),
    ).toEqual([{ email: 'idris@petrel.example', roles: ['captain'] }]);
    expect(await look('SELECT recipient FROM mail_outbox WHERE vessel_id = $id', { id: vesselId })).toEqual([
      { recipient: 'idris@petrel.example' },
    ]);
    expect(await logged(vesselId)).toEqual(['vessel.added', 'invitation.sent']);
    // The dealer sees her from outside only.
    await client.get(`/vessels/${vesselId}`).expect(404);
  });

  test('asked twice with one key, she is added once', async () => {
    const { client } = await desk();
    const ask = () => client.post('/fleet/vessels', PETREL).set('Idempotency-Key', 'the-same-key');
    const [one, two] = [await ask().expect(201), await ask().expect(201)];
    expect(two.body).toEqual(one.body);
  });

  test('R13, R14, R17: asks for a fresh proof, and is nobody else’s', async () => {
    const { dealerId, client } = await desk();
    const vesselId = await make.vessel({ dealerId });
    await anonymousClient(app).post('/fleet/vessels', PETREL).expect(401);
    await (await as(vesselId, 'captain')).post('/fleet/vessels', PETREL).expect(404);
    const wrong = await client
      .post('/fleet/vessels', { ...PETREL, zone: 'Europe/Atlantis', dealerId })
      .expect(422);
    expect(Object.keys(wrong.body.errors)).toEqual(['dealerId']);
    const zone = await client.post('/fleet/vessels', { ...PETREL, zone: 'Europe/Atlantis' }).expect(422);
    expect(Object.keys(zone.body.errors)).toEqual(['zone']);
    app.clock.advance(11 * 60_000);
    expect((await client.post('/fleet/vessels', PETREL).expect(403)).body.code).toBe('step_up');
  });
});
