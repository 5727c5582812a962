import { invalid } from '../errors.ts';
import { appendLog, type LogEvent } from '../handovers/appendLog.ts';
import type { Verb } from '../http/verb.ts';

/** The vessel of the request; the guard has let only its own people through. */
export const vesselOf = ({ actor }: Pick<Verb, 'actor'>): string => actor.vesselId ?? '';

/** Appends entries of this verb: its vessel, its instant and who did it are filled in. */
export async function logThat(
  context: Verb,
  ...events: readonly Omit<LogEvent, 'vesselId' | 'at' | 'actor'>[]
): Promise<void> {
  const { services, tx, actor, now } = context;
  await appendLog(
    services,
    tx,
    events.map((event) => ({
      ...event,
      vesselId: vesselOf(context),
      at: now,
      actor: { id: actor.personId, name: actor.name },
    })),
  );
}

/** Refuses a stay that ends before it begins; `field` is where the end was given. */
export function requireOrder(from: Date, until: Date, field: string): void {
  if (until.getTime() <= from.getTime())
    throw invalid({ [field]: ['This must be later than the time it starts'] });
}

/** Refuses a cabin of another vessel. Keys are the fields the cabins were given in. */
export async function requireCabins(
  { services, tx, actor }: Verb,
  given: ReadonlyMap<string, string>,
): Promise<void> {
  const ids = [...new Set(given.values())];
  if (ids.length === 0) return;
  const known = await services.db.rows<{ id: string }>(
    tx,
    'SELECT id FROM cabins WHERE vessel_id = $vessel AND id = ANY($ids::uuid[])',
    { vessel: actor.vesselId, ids },
  );
  const found = new Set(known.map(({ id }) => id));
  const errors: Record<string, string[]> = {};
  for (const [field, cabin] of given) {
    if (!found.has(cabin.toLowerCase())) errors[field] = ['Choose one of the cabins of this vessel'];
  }
  if (Object.keys(errors).length > 0) throw invalid(errors);
}
