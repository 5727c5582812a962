import { randomUUID } from 'node:crypto';
import {
  DEALER_ROLES,
  type DealerRole,
  ROLE_NAMES,
  type VesselRole,
} from '../../shared/rules/permissions.ts';
import { hashPassword } from '../auth/passwords.ts';
import type { Tx } from '../db/connection.ts';
import { appendLog, type LogEvent } from '../handovers/appendLog.ts';
import type { Services } from '../services.ts';
import { minutes } from './calendar.ts';
import { dice } from './dice.ts';
import { writeHandovers } from './holdings.ts';
import type { LaidVessel, Laying } from './laying.ts';
import { layOrdinary } from './ordinary.ts';
import { DEMO_PEOPLE, type DemoPerson, demoPassword } from './people.ts';
import { Rows } from './rows.ts';
import { layAnselma, layCorvina, layPetrelHollow, laySolveigMaren } from './stories.ts';
import { layTamarisk } from './tamarisk.ts';

/** The same story every time; only the dates, the secrets and the identifiers differ. */
const SEED = 4180;
const DEALER = 'Halden & Roe Marine Systems';

/** A person of the demo as the sign-in list shows them. The password is theirs for this installation only. */
export interface DemoSignIn {
  readonly name: string;
  readonly role: string;
  /** Their vessel's name, or the dealer's. */
  readonly vessel: string;
  readonly email: string;
  readonly password: string;
}

/**
 * Lays the demo fleet once, in one transaction, dated around `services.clock.now()` so that a party arrives
 * today. Answers the sign-ins, or null when it was laid before. `keep` is called with them before the commit,
 * so that no fleet exists whose passwords nobody was told.
 * @throws when the server runs in production.
 */
export async function layDemo(
  services: Services,
  keep: (people: readonly DemoSignIn[]) => Promise<void>,
): Promise<readonly DemoSignIn[] | null> {
  if (services.config.production) throw new Error('The demo fleet is never laid in production.');
  const now = services.clock.now();
  const signIns = DEMO_PEOPLE.map((person) => ({ person, password: demoPassword() }));
  return services.db.transaction({ kind: 'system' }, async (tx) => {
    const { db } = services;
    const laid = await db.row<{ demo_laid_at: Date | null }>(
      tx,
      'SELECT demo_laid_at FROM installation FOR UPDATE',
    );
    if (!laid) throw new Error('The database is not set up; run the migrations first.');
    if (laid.demo_laid_at !== null) return null;

    const dealerId = randomUUID();
    const rows = new Rows();
    const log: LogEvent[] = [];
    rows.add('dealers', {
      id: dealerId,
      name: DEALER,
      second_factor_roles: [],
      created_at: minutes(now, -1_000_000),
    });
    await rows.write(services, tx);
    const laying: Laying = { services, tx, now, dice: dice(SEED), rows, log, handovers: [], dealerId };
    const vessels = [
      await layTamarisk(laying),
      await laySolveigMaren(laying),
      await layCorvina(laying),
      await layPetrelHollow(laying),
      await layAnselma(laying),
    ];
    await layOrdinary(laying);
    await rows.write(services, tx);
    await writeHandovers(laying);
    for (const { person, password } of signIns) {
      await layPerson(laying, person, await hashPassword(services.config, password), vessels);
    }
    await rows.write(services, tx);
    await finish(services, tx, log);
    const people = signIns.map(({ person, password }) => ({
      name: person.name,
      role: person.roles.map((role) => ROLE_NAMES[role]).join(', '),
      vessel: person.vessel ?? DEALER,
      email: person.email,
      password,
    }));
    await keep(people);
    await db.run(tx, 'UPDATE installation SET demo_laid_at = $now', { now });
    return people;
  });
}

const isDealerRole = (role: VesselRole | DealerRole): role is DealerRole =>
  (DEALER_ROLES as readonly string[]).includes(role);

/** An account, its roles, and its entry on the crew list. */
async function layPerson(
  { services, tx, rows, now, dealerId, log }: Laying,
  person: DemoPerson,
  passwordHash: string,
  vessels: readonly LaidVessel[],
): Promise<void> {
  const id = randomUUID();
  const since = minutes(now, -240 * 1440);
  rows.add('people', {
    id,
    name: person.name,
    email: person.email,
    locale: 'en',
    password_hash: passwordHash,
    totp_last_step: 0,
    demo: true,
    created_at: since,
    updated_at: since,
  });
  const vessel = vessels.find(({ plan }) => plan.name === person.vessel);
  for (const role of person.roles) {
    if (isDealerRole(role)) {
      rows.add('dealer_members', {
        id: randomUUID(),
        person_id: id,
        dealer_id: dealerId,
        role,
        given_at: since,
      });
    } else if (vessel) {
      rows.add('memberships', {
        id: randomUUID(),
        person_id: id,
        vessel_id: vessel.id,
        role,
        given_at: since,
      });
      log.push({
        vesselId: vessel.id,
        kind: 'role.given',
        at: since,
        subject: { kind: 'person', id, name: person.name },
        body: { role },
      });
    }
  }
  const member = vessel?.crew.find(({ email }) => email === person.email);
  if (!member) return;
  await rows.write(services, tx);
  await services.db.run(tx, 'UPDATE crew_members SET person_id = $person WHERE id = $id', {
    person: id,
    id: member.id,
  });
}

/** Tickets as counted by the changes laid, statistics for the planner, and the log in the order it happened. */
async function finish(services: Services, tx: Tx, log: LogEvent[]): Promise<void> {
  await services.db.run(
    tx,
    `UPDATE networks n SET last_ticket = r.ticket
     FROM (SELECT network_id, max(ticket) AS ticket FROM rotations WHERE ticket IS NOT NULL GROUP BY network_id) r
     WHERE r.network_id = n.id`,
  );
  await appendLog(
    services,
    tx,
    [...log].sort((one, other) => one.at.getTime() - other.at.getTime()),
  );
}
