import { randomUUID } from 'node:crypto';
import { sealPassphrase } from '../../server/passphrases/sealPassphrase.ts';
import type { Audience, VesselRole } from '../../shared/rules/permissions.ts';
import type { TestApp } from './app.ts';
import { Client } from './client.ts';
import { factories } from './factories.ts';

export interface Person {
  readonly id: string;
  readonly name: string | null;
  readonly language: string;
}

export interface Boat {
  readonly vesselId: string;
  readonly base: string;
  readonly cabins: { readonly id: string; readonly name: string }[];
  readonly partyId: string;
  readonly guests: Person[];
  readonly crewMemberId: string;
  readonly networks: Record<
    Audience,
    { readonly id: string; readonly passphraseId: string; readonly passphrase: string }
  >;
  readonly as: (role: VesselRole, name?: string) => Promise<Client>;
}

/** The guests every boat of these tests begins with; the third's name is withheld. */
export const GUESTS = [
  { name: 'Sigrun Brandvold', language: 'en' },
  { name: 'Matteo Quaranta', language: 'it' },
  { name: null, language: 'el' },
] as const;

export const day = (test: TestApp, days: number, hours = 0): Date =>
  new Date(test.clock.now().getTime() + days * 86_400_000 + hours * 3_600_000);

/** Boats with two cabins, a party aboard since two hours for six days, and a network of each audience. */
export function boats(test: TestApp) {
  const make = factories(test);
  const write = (sql: string, bind: Record<string, unknown>) =>
    test.services.db.transaction({ kind: 'system' }, (tx) => test.services.db.run(tx, sql, bind));
  const rows = <T extends object = Record<string, unknown>>(
    sql: string,
    bind: Record<string, unknown> = {},
  ) => test.services.db.transaction({ kind: 'system' }, (tx) => test.services.db.rows<T>(tx, sql, bind));

  const world = {
    write,
    rows,

    async party(vesselId: string, from: Date, until: Date, name = 'Brandvold party'): Promise<string> {
      const id = randomUUID();
      await write(
        `INSERT INTO parties(id, vessel_id, name, arrives_at, leaves_at, created_at, updated_at)
         VALUES ($id, $vessel, $name, $from, $until, $now, $now)`,
        { id, vessel: vesselId, name, from, until, now: test.clock.now() },
      );
      return id;
    },

    async guest(
      vesselId: string,
      partyId: string | null,
      given: {
        name: string | null;
        language?: string;
        from?: Date;
        until?: Date;
        cabinId?: string;
        position?: number;
      },
    ): Promise<string> {
      const id = randomUUID();
      await write(
        `INSERT INTO guests(id, vessel_id, party_id, cabin_id, name, label, language, from_at, until_at, position, created_at, updated_at)
         VALUES ($id, $vessel, $party, $cabin, $name, $label, $language, $from, $until, $position, $now, $now)`,
        {
          id,
          vessel: vesselId,
          party: partyId,
          cabin: given.cabinId ?? null,
          name: given.name,
          label: `Guest ${(given.position ?? 0) + 1}`,
          language: given.language ?? 'en',
          from: given.from ?? day(test, 0, -2),
          until: given.until ?? day(test, 6),
          position: given.position ?? 0,
          now: test.clock.now(),
        },
      );
      return id;
    },

    /** A change of the network whose next passphrase is made and waits for its time. */
    async staged(vesselId: string, networkId: string, passphrase: string, dueAt: Date): Promise<string> {
      const { services } = test;
      const now = test.clock.now();
      const passphraseId = await services.db.transaction({ kind: 'system' }, (tx) =>
        sealPassphrase(services, tx, {
          vesselId,
          networkId,
          passphrase,
          origin: 'generated',
          bits: 64.62,
          now,
        }),
      );
      await write(
        `INSERT INTO rotations(id, vessel_id, network_id, state, driver, epoch, ticket, from_passphrase_id, to_passphrase_id,
           planned_by, due_at, staged_at, created_at, updated_at)
         SELECT $id, $vessel, $network, 'staged', 'by_hand', 1, 1, p.id, $to, 'person', $due, $now, $now, $now
         FROM passphrases p WHERE p.network_id = $network AND p.live_at IS NOT NULL AND p.retired_at IS NULL`,
        { id: randomUUID(), vessel: vesselId, network: networkId, to: passphraseId, due: dueAt, now },
      );
      return passphraseId;
    },

    async boat(given: { name?: string } = {}): Promise<Boat> {
      const name = given.name ?? 'Tamarisk';
      const now = test.clock.now();
      const vesselId = await make.vessel({ name });
      const cabins = [
        { id: randomUUID(), name: "Owner's suite", deck: 'Bridge deck' },
        { id: randomUUID(), name: 'Port VIP', deck: 'Lower deck' },
      ];
      for (const [position, cabin] of cabins.entries()) {
        await write(
          'INSERT INTO cabins(id, vessel_id, deck, name, position) VALUES ($id, $vessel, $deck, $name, $position)',
          { ...cabin, vessel: vesselId, position },
        );
      }
      const partyId = await world.party(vesselId, day(test, 0, -2), day(test, 6));
      const guests: Person[] = [];
      for (const [position, guest] of GUESTS.entries()) {
        const cabinId = at(cabins, Math.min(position, 1)).id;
        guests.push({ id: await world.guest(vesselId, partyId, { ...guest, cabinId, position }), ...guest });
      }
      const crewMemberId = randomUUID();
      await write(
        `INSERT INTO crew_members(id, vessel_id, name, position, signed_on_at, created_at, updated_at)
         VALUES ($id, $vessel, 'Tomasz Wierzba', 'Deckhand', $now, $now, $now)`,
        { id: crewMemberId, vessel: vesselId, now },
      );
      const networks = {} as Record<Audience, Boat['networks'][Audience]>;
      for (const audience of ['owner', 'guest', 'crew'] as const) {
        const passphrase = `${audience}-marker-${vesselId.slice(0, 8)}`;
        const network = await make.network(vesselId, {
          audience,
          ssid: `${name} ${audience}`,
          live: passphrase,
          liveAt: day(test, -1),
        });
        networks[audience] = { id: network.id, passphraseId: network.passphraseId ?? '', passphrase };
      }
      return {
        vesselId,
        base: `/vessels/${vesselId}`,
        cabins,
        partyId,
        guests,
        crewMemberId,
        networks,
        as: async (role, called) =>
          new Client(
            test,
            await make.session((await make.member(vesselId, role, called ? { name: called } : {})).id),
          ),
      };
    },
  };
  return world;
}

/** The index-th of a list that must have it. */
export function at<T>(list: readonly T[], index: number): T {
  const found = list[index];
  if (found === undefined) throw new Error(`there is no entry ${index}`);
  return found;
}
