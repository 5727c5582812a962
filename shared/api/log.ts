import { z } from 'zod';
import { SEARCH_MAX } from '../rules/limits.ts';
import { LOG_KINDS, type LogKind } from '../rules/logKinds.ts';
import { isPlainLine } from '../rules/plainLine.ts';
import { id, instant, pageQuery, vesselParams } from './common.ts';
import { contract, vessel } from './contract.ts';

const kinds = Object.keys(LOG_KINDS) as [LogKind, ...LogKind[]];

/** What a list or an export of the log is narrowed to. */
export const logFilter = z.strictObject({
  networkId: id.optional(),
  kind: z.enum(kinds, 'Choose one of the kinds of the log').optional(),
  /** Part of the name of whom it is about or who did it. */
  person: z
    .string()
    .trim()
    .min(2, 'Give at least two letters of the name')
    .max(SEARCH_MAX, `Keep it to ${SEARCH_MAX} characters`)
    .refine(isPlainLine, 'Leave out line breaks and control characters')
    .optional(),
  from: instant.optional(),
  to: instant.optional(),
});
export type LogFilter = z.infer<typeof logFilter>;

export const logEntry = z.strictObject({
  id,
  seq: z.number().int(),
  at: instant,
  kind: z.enum(kinds),
  /** The kind in words: "Card handed over". */
  words: z.string(),
  network: z.strictObject({ id, ssid: z.string() }).nullable(),
  subject: z
    .strictObject({
      kind: z.enum(['guest', 'crew', 'person', 'card', 'rotation', 'access_point']),
      id,
      /** Null where there was none or it was erased. */
      name: z.string().nullable(),
    })
    .nullable(),
  actor: z.strictObject({ id, name: z.string().nullable() }).nullable(),
  /** Facts of the entry: serial, format, due time. Never a name or a passphrase. */
  facts: z.record(z.string(), z.union([z.string(), z.number(), z.boolean(), z.null()])),
});
export type LogEntry = z.infer<typeof logEntry>;

export const logPage = z.strictObject({
  zone: z.string(),
  entries: z.array(logEntry),
  after: z.string().nullable(),
});
export type LogPage = z.infer<typeof logPage>;

export const readLog = contract({
  name: 'log.read',
  method: 'GET',
  path: '/vessels/:vesselId/log',
  summary: 'The log, newest first',
  access: vessel('log.view'),
  params: vesselParams,
  query: logFilter.extend(pageQuery.shape),
  response: logPage,
});

export const exportLog = contract({
  name: 'log.export',
  method: 'POST',
  path: '/vessels/:vesselId/log/export',
  summary: 'The log as CSV; the export is itself an entry',
  access: vessel('log.export'),
  fresh: true,
  params: vesselParams,
  body: logFilter,
  response: 'csv',
});
