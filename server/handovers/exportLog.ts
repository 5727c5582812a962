import type { LogFilter } from '../../shared/api/log.ts';
import { shipTime } from '../../shared/rules/shipTime.ts';
import { AppError } from '../errors.ts';
import { csvText } from '../http/csv.ts';
import type { FileReply } from '../http/reply.ts';
import type { Verb } from '../http/verb.ts';
import { shipZones } from '../vessels/readVessel.ts';
import { appendLog } from './appendLog.ts';
import { logEntries } from './readLog.ts';

/** Most entries of one export: about 10 MB. */
const EXPORT_MAX = 50_000;

const HEADING = [
  'No.',
  'UTC',
  "Ship's time",
  'What',
  'Network',
  'About',
  'Done by',
  'Serial',
  'Details',
] as const;

/** The log as CSV, newest first. The export is an entry itself, written first: without it nothing leaves. */
export async function exportLog({ services, tx, actor, now }: Verb, filter: LogFilter): Promise<FileReply> {
  const vesselId = actor.vesselId ?? '';
  const entries = await logEntries(services, tx, vesselId, { filter, before: null, limit: EXPORT_MAX + 1 });
  if (entries.length > EXPORT_MAX) {
    throw new AppError('too_large', `That is more than ${EXPORT_MAX} entries. Choose a shorter time.`);
  }
  await appendLog(services, tx, [
    {
      vesselId,
      kind: 'log.exported',
      at: now,
      networkId: filter.networkId ?? null,
      actor: { id: actor.personId, name: actor.name },
      body: { entries: entries.length, from: filter.from ?? null, to: filter.to ?? null },
    },
  ]);
  const zones = await shipZones(services, tx, vesselId);
  const rows = entries.map((entry) => {
    const { serial = null, ...rest } = entry.facts;
    return [
      entry.seq,
      entry.at,
      shipTime(zones, new Date(entry.at))
        .toPlainDateTime()
        .toString({ smallestUnit: 'second' })
        .replace('T', ' '),
      entry.words,
      entry.network?.ssid ?? null,
      entry.subject?.name ?? null,
      entry.actor?.name ?? null,
      serial === null ? null : String(serial),
      Object.entries(rest)
        .map(([name, value]) => `${name}: ${value}`)
        .join('; '),
    ];
  });
  return {
    contentType: 'text/csv; charset=utf-8',
    filename: `log-${now.toISOString().slice(0, 10)}.csv`,
    body: csvText(HEADING, rows),
  };
}
