import { randomUUID } from 'node:crypto';
import { Calendar, minutes } from './calendar.ts';
import type { CrewPlan, LaidNetwork, LaidVessel, Laying, NetworkPlan, VesselPlan } from './laying.ts';
import { layRotations, sealGenerations } from './passphrases.ts';

const LONG_AGO = new Date('2020-01-01T00:00:00Z');

/** A vessel with its crew, networks, passphrases in force and how they came into force. */
export async function layVessel(laying: Laying, plan: VesselPlan): Promise<LaidVessel> {
  const { rows, now, services, tx } = laying;
  const id = randomUUID();
  const created = minutes(now, -2 * 365 * 1440);
  const calendar = new Calendar([{ zone: plan.zone, fromAt: LONG_AGO }], now);
  rows.add('vessels', {
    id,
    dealer_id: laying.dealerId,
    name: plan.name,
    kind: plan.kind,
    length_m: plan.lengthM,
    guests_max: plan.guestsMax,
    home_port: plan.homePort,
    owner_name: plan.ownerName,
    lying: plan.lying,
    source: plan.source,
    retention_days: 90,
    // Demo people sign in with a password alone; a real vessel asks its captain for a second factor.
    second_factor_roles: [],
    driver: plan.driver,
    serial_prefix: 'M',
    last_serial: plan.lastSerial ?? 1000,
    epoch: 1,
    last_heard_at: plan.lastHeardAt,
    demo: true,
    created_at: created,
    updated_at: now,
  });
  rows.add('ship_zones', { id: randomUUID(), vessel_id: id, zone: plan.zone, from_at: LONG_AGO });
  const accessPointIds = plan.accessPoints.map((point, position) => {
    const pointId = randomUUID();
    rows.add('access_points', {
      id: pointId,
      vessel_id: id,
      name: point.name,
      deck: point.deck ?? null,
      position,
    });
    return pointId;
  });
  const crew = plan.crew.map((member) => layCrew(laying, id, calendar, member));
  const networkIds = plan.networks.map((network) => layNetwork(laying, id, created, network));
  await rows.write(services, tx);

  const networks: LaidNetwork[] = [];
  for (const [index, network] of plan.networks.entries()) {
    const networkId = networkIds[index];
    if (networkId === undefined) continue;
    const sealed = await sealGenerations(laying, id, networkId, network);
    layRotations(laying, { id, driver: plan.driver, accessPointIds }, networkId, network, sealed);
    networks.push({ ...network, id: networkId, passphraseId: sealed.live });
  }
  return { id, plan, calendar, accessPointIds, crew, networks };
}

function layNetwork({ rows, now }: Laying, vesselId: string, created: Date, network: NetworkPlan): string {
  const id = randomUUID();
  rows.add('networks', {
    id,
    vessel_id: vesselId,
    ssid: network.ssid,
    audience: network.audience,
    security: network.security,
    hidden: false,
    carries_equipment: false,
    last_ticket: 0,
    last_generation: 0,
    created_at: created,
    updated_at: now,
  });
  rows.add('policies', {
    network_id: id,
    vessel_id: vesselId,
    age_limit_days: network.limitDays,
    least_bits: 64,
    words: 5,
    quiet_hours: network.quietHours,
    on_party_departure: network.movesUp && network.audience === 'guest',
    on_sign_off: network.movesUp && network.audience === 'crew',
    on_lost_card: network.movesUp,
    on_leak: network.movesUp,
    updated_at: created,
  });
  return id;
}

function layCrew({ rows, log, now }: Laying, vesselId: string, calendar: Calendar, member: CrewPlan) {
  const id = randomUUID();
  const signedOn = calendar.aged(member.signedOnDays, '09:00');
  rows.add('crew_members', {
    id,
    vessel_id: vesselId,
    person_id: null,
    name: member.name,
    position: member.position,
    department: member.department ?? '',
    email: member.email ?? null,
    language: 'en',
    signed_on_at: signedOn,
    signed_off_at: member.signedOffAt ?? null,
    created_at: signedOn,
    updated_at: now,
  });
  const subject = { kind: 'crew', id, name: member.name } as const;
  log.push({ vesselId, kind: 'crew.signed_on', at: signedOn, subject, body: { position: member.position } });
  if (member.signedOffAt) {
    log.push({
      vesselId,
      kind: 'crew.signed_off',
      at: member.signedOffAt,
      subject,
      body: { position: member.position },
    });
  }
  return { ...member, id };
}
