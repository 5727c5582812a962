import type { ListPreview } from '../../shared/api/arrivals.ts';
import { readGuestList } from '../../shared/rules/guestList.ts';
import { invalid } from '../errors.ts';
import type { Verb } from '../http/verb.ts';
import { shipZones } from '../vessels/readVessel.ts';
import { decodeUpload } from './decodeUpload.ts';

/** What a list would add, and which of its lines are wrong. Nothing of it is kept. */
export async function previewList(
  { services, tx, actor }: Verb,
  given: {
    readonly text?: string;
    readonly base64?: string;
    readonly dateOrder?: 'day_first' | 'month_first';
    readonly arrivesAt?: string;
    readonly leavesAt?: string;
  },
): Promise<ListPreview> {
  const field = given.base64 === undefined ? 'text' : 'base64';
  const { text, encoding } = decodeUpload(
    Buffer.from(given.base64 ?? given.text ?? '', given.base64 === undefined ? 'utf8' : 'base64'),
  );
  const cabins = await services.db.rows<{ id: string; name: string }>(
    tx,
    'SELECT id, name FROM cabins WHERE vessel_id = $vessel',
    { vessel: actor.vesselId },
  );
  const list = readGuestList(text, {
    cabins,
    zones: await shipZones(services, tx, actor.vesselId ?? ''),
    dateOrder: given.dateOrder ?? null,
    party:
      given.arrivesAt && given.leavesAt
        ? { arrivesAt: new Date(given.arrivesAt), leavesAt: new Date(given.leavesAt) }
        : null,
  });
  if (typeof list === 'string') throw invalid({ [field]: [list] });
  return {
    ...list,
    encoding,
    columns: [...list.columns],
    wrong: [...list.wrong],
    rows: list.rows.map((row) => ({
      ...row,
      notes: [...row.notes],
      fromAt: row.fromAt?.toISOString() ?? null,
      untilAt: row.untilAt?.toISOString() ?? null,
    })),
  };
}
