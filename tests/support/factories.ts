import { randomUUID } from 'node:crypto';
import { newToken, sha256 } from '../../server/http/session.ts';
import { sealPassphrase } from '../../server/passphrases/sealPassphrase.ts';
import type { Audience, DealerRole, VesselRole } from '../../shared/rules/permissions.ts';
import type { TestApp } from './app.ts';

/** Rows for tests, parents filled in. Each writes straight to the database, in the system's scope. */
export function factories(test: TestApp) {
  const run = (sql: string, bind: Record<string, unknown>) =>
    test.services.db.transaction({ kind: 'system' }, (tx) => test.services.db.run(tx, sql, bind));
  const now = () => test.clock.now();

  const make = {
    async dealer(name = 'Halden & Roe'): Promise<string> {
      const id = randomUUID();
      await run(
        "INSERT INTO dealers(id, name, second_factor_roles, created_at) VALUES ($id, $name, '{}', $now)",
        { id, name, now: now() },
      );
      return id;
    },

    async vessel(
      given: { name?: string; dealerId?: string; zone?: string; driver?: string } = {},
    ): Promise<string> {
      const id = randomUUID();
      await run(
        `INSERT INTO vessels(id, dealer_id, name, home_port, owner_name, lying, driver, second_factor_roles, created_at, updated_at)
         VALUES ($id, $dealer, $name, 'Split', 'Ottoline Brandt', 'Split, berth C14', $driver, '{}', $now, $now)`,
        {
          id,
          dealer: given.dealerId ?? null,
          name: given.name ?? 'Tamarisk',
          driver: given.driver ?? 'by_hand',
          now: now(),
        },
      );
      await run('INSERT INTO ship_zones(id, vessel_id, zone, from_at) VALUES ($zoneId, $id, $zone, $from)', {
        zoneId: randomUUID(),
        id,
        zone: given.zone ?? 'Europe/Zagreb',
        from: new Date('2020-01-01T00:00:00Z'),
      });
      return id;
    },

    async person(
      given: { name?: string; email?: string } = {},
    ): Promise<{ id: string; name: string; email: string }> {
      const id = randomUUID();
      const name = given.name ?? `Person ${id.slice(0, 4)}`;
      const email = given.email ?? `${id.slice(0, 8)}@crew.example`;
      await run(
        'INSERT INTO people(id, name, email, created_at, updated_at) VALUES ($id, $name, $email, $now, $now)',
        { id, name, email, now: now() },
      );
      return { id, name, email };
    },

    async member(
      vesselId: string,
      role: VesselRole,
      given: { personId?: string; name?: string } = {},
    ): Promise<{ id: string; name: string; email: string }> {
      const person = given.personId
        ? { id: given.personId, name: '', email: '' }
        : await make.person({ name: given.name });
      await run(
        'INSERT INTO memberships(id, person_id, vessel_id, role, given_at) VALUES ($id, $person, $vessel, $role, $now)',
        {
          id: randomUUID(),
          person: person.id,
          vessel: vesselId,
          role,
          now: now(),
        },
      );
      return person;
    },

    async dealerMember(dealerId: string, role: DealerRole = 'service_desk') {
      const person = await make.person();
      await run(
        'INSERT INTO dealer_members(id, person_id, dealer_id, role, given_at) VALUES ($id, $person, $dealer, $role, $now)',
        {
          id: randomUUID(),
          person: person.id,
          dealer: dealerId,
          role,
          now: now(),
        },
      );
      return person;
    },

    /** A live session for the person; answers the session's id (not its hash). */
    async session(personId: string): Promise<string> {
      const sessionId = newToken();
      const at = now();
      await run(
        `INSERT INTO sessions(id_hash, public_id, person_id, label, created_at, last_seen_at, expires_at, proved_at, second_factor_at)
         VALUES ($hash, $public, $person, 'Test browser', $at, $at, $expires, $at, NULL)`,
        {
          hash: sha256(sessionId),
          public: randomUUID(),
          person: personId,
          at,
          expires: new Date(at.getTime() + 12 * 3_600_000),
        },
      );
      return sessionId;
    },

    async accessPoint(vesselId: string, name: string): Promise<string> {
      const id = randomUUID();
      await run('INSERT INTO access_points(id, vessel_id, name) VALUES ($id, $vessel, $name)', {
        id,
        vessel: vesselId,
        name,
      });
      return id;
    },

    /** A network with its policy; `live` is its passphrase in force, if any. */
    async network(
      vesselId: string,
      given: {
        ssid?: string;
        audience?: Audience;
        security?: string;
        hidden?: boolean;
        carriesEquipment?: boolean;
        live?: string;
        liveAt?: Date;
        ageLimitDays?: number;
        bits?: number;
      } = {},
    ): Promise<{ id: string; passphraseId: string | null }> {
      const id = randomUUID();
      const audience = given.audience ?? 'guest';
      await run(
        `INSERT INTO networks(id, vessel_id, ssid, audience, security, hidden, carries_equipment, created_at, updated_at)
         VALUES ($id, $vessel, $ssid, $audience, $security, $hidden, $equipment, $now, $now)`,
        {
          id,
          vessel: vesselId,
          ssid: given.ssid ?? `Tamarisk ${audience}`,
          audience,
          security: given.security ?? 'wpa2',
          hidden: given.hidden ?? false,
          equipment: given.carriesEquipment ?? false,
          now: now(),
        },
      );
      await run(
        `INSERT INTO policies(network_id, vessel_id, age_limit_days, on_party_departure, on_sign_off, updated_at)
         VALUES ($id, $vessel, $limit, $guest, $crew, $now)`,
        {
          id,
          vessel: vesselId,
          limit: given.ageLimitDays ?? (audience === 'guest' ? 14 : audience === 'crew' ? 45 : 365),
          guest: audience === 'guest',
          crew: audience === 'crew',
          now: now(),
        },
      );
      const passphraseId = given.live
        ? await make.livePassphrase(vesselId, id, given.live, { liveAt: given.liveAt, bits: given.bits })
        : null;
      return { id, passphraseId };
    },

    async livePassphrase(
      vesselId: string,
      networkId: string,
      passphrase: string,
      given: { liveAt?: Date; bits?: number } = {},
    ): Promise<string> {
      const { services } = test;
      return services.db.transaction({ kind: 'system' }, async (tx) => {
        const id = await sealPassphrase(services, tx, {
          vesselId,
          networkId,
          passphrase,
          origin: 'generated',
          bits: given.bits ?? 64.62,
          now: now(),
        });
        await services.db.run(tx, 'UPDATE passphrases SET live_at = $at WHERE id = $id', {
          id,
          at: given.liveAt ?? now(),
        });
        return id;
      });
    },
  };
  return make;
}
