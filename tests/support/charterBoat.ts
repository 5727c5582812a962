import { randomUUID } from 'node:crypto';
import type { VesselRole } from '../../shared/rules/permissions.ts';
import { aboard } from './aboard.ts';
import type { TestApp } from './app.ts';
import type { factories } from './factories.ts';

let serial = 2000;

/** A vessel with a guest network, two cabins, a party aboard and people to ask for. */
export async function charterBoat(app: TestApp, make: ReturnType<typeof factories>) {
  const vesselId = await make.vessel();
  await make.accessPoint(vesselId, 'Salon');
  const network = await make.network(vesselId, {
    audience: 'guest',
    live: `guests-of-${vesselId.slice(0, 13)}`,
    liveAt: new Date(app.clock.now().getTime() - 2 * 86_400_000),
  });
  const { as: signedIn, look, write: run, logged } = aboard(app);
  const rows = <T extends object>(sql: string, bind: Record<string, unknown> = {}) =>
    look<T>(sql, { vessel: vesselId, ...bind });
  const cabin = async (name: string, position: number) => {
    const id = randomUUID();
    await run(
      "INSERT INTO cabins(id, vessel_id, deck, name, position) VALUES ($id, $vessel, 'Main deck', $name, $position)",
      { id, vessel: vesselId, name, position },
    );
    return id;
  };
  const as = (role: VesselRole) => signedIn(vesselId, role);
  const base = `/vessels/${vesselId}`;
  const purser = await as('purser');
  const hours = (count: number) => new Date(app.clock.now().getTime() + count * 3_600_000).toISOString();
  const party = async (name = 'Halloran party', from = -2, until = 160): Promise<string> => {
    const made = await purser
      .post(`${base}/parties`, { name, arrivesAt: hours(from), leavesAt: hours(until) })
      .expect(201);
    return made.body.id;
  };
  const guest = async (
    partyId: string,
    name: string | null = 'Anna Brandt',
    more: object = {},
  ): Promise<string> => {
    const made = await purser.post(`${base}/guests`, { partyId, name, ...more }).expect(201);
    return made.body.id;
  };
  /** A card as the print room would leave it. */
  const printCard = async (
    guestId: string | null,
    passphraseId = network.passphraseId,
  ): Promise<{ id: string; serial: string }> => {
    const made = { id: randomUUID(), serial: `M-${++serial}` };
    await run(
      `INSERT INTO cards(id, vessel_id, network_id, passphrase_id, serial, format, language, guest_id, state, printed_at)
       VALUES ($id, $vessel, $network, $passphrase, $serial, 'wallet', 'en', $guest, 'printed', $now)`,
      {
        ...made,
        vessel: vesselId,
        network: network.id,
        passphrase: passphraseId,
        guest: guestId,
        now: app.clock.now(),
      },
    );
    return made;
  };
  const kinds = () => logged(vesselId);
  return { vesselId, network, base, purser, as, run, rows, cabin, party, guest, printCard, hours, kinds };
}
