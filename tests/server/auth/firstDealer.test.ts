import { describe, expect, test } from 'vitest';
import { firstDealer } from '../../../server/auth/firstDealer.ts';
import { useApp } from '../../support/app.ts';
import { anonymousClient } from '../../support/client.ts';

const app = useApp();
const given = {
  dealer: 'Vermeulen Yacht Systems',
  name: 'Anneke Vermeulen',
  email: 'anneke@vermeulen.example',
};
const make = () =>
  app.services.db.transaction({ kind: 'none' }, (tx) => firstDealer(app.services, tx, given));

describe('the first dealer', () => {
  test('sets a password by the link once, and signs in with it', async () => {
    const token = await make();
    const nobody = anonymousClient(app);
    await nobody.post('/password-resets/use', { token, password: 'four quiet lamps aboard' }).expect(204);
    await nobody.post('/password-resets/use', { token, password: 'four quiet lamps aboard' }).expect(410);
    await nobody.post('/session', { email: given.email, password: 'four quiet lamps aboard' }).expect(200);
    await nobody.post('/session', { email: given.email, password: 'four quiet lamps ashore' }).expect(401);
  });

  test('is made once', async () => {
    await expect(make()).rejects.toMatchObject({ code: 'conflict' });
  });
});
