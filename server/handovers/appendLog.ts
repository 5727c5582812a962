import { createHash, randomBytes, randomUUID } from 'node:crypto';
import canonicalize from 'canonicalize';
import { DatabaseError } from 'sequelize';
import type { LogKind } from '../../shared/rules/logKinds.ts';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import type { Services } from '../services.ts';

/** What an entry is about. */
export interface LogEvent {
  readonly vesselId: string;
  readonly kind: LogKind;
  readonly at: Date;
  readonly networkId?: string | null;
  readonly passphraseId?: string | null;
  readonly subject?: {
    readonly kind: SubjectKind;
    readonly id: string;
    readonly name?: string | null;
  } | null;
  readonly actor?: { readonly id: string; readonly name: string } | null;
  /** Facts without names and without secrets. */
  readonly body?: Record<string, string | number | boolean | null>;
}

export type SubjectKind = 'guest' | 'crew' | 'person' | 'card' | 'rotation' | 'access_point';

interface Head {
  vessel_id: string;
  seq: string;
  hash: Buffer;
}

/** The hash every vessel's chain starts from. */
export const GENESIS = createHash('sha256').update('Quayword log').digest();

/** What an entry says about a name: SHA-256 over a salt of its own and the name, in hexadecimal. */
export const commitment = (salt: Buffer, name: string) =>
  createHash('sha256').update(salt).update(name).digest('hex');

export interface ChainedFields {
  readonly id: string;
  readonly vesselId: string;
  readonly seq: number;
  readonly at: string;
  readonly kind: string;
  readonly networkId: string | null;
  readonly passphraseId: string | null;
  readonly subjectKind: string | null;
  readonly subjectId: string | null;
  readonly actorId: string | null;
  readonly body: Record<string, unknown>;
}

/** SHA-256 over the previous hash and the entry as canonical JSON (RFC 8785). */
export function entryHash(prev: Buffer, fields: ChainedFields): Buffer {
  const text = canonicalize(fields);
  if (text === undefined) throw new Error('An entry could not be written down');
  return createHash('sha256').update(prev).update(text).digest();
}

/**
 * Appends entries to their vessels' chains inside the caller's transaction, so an entry exists exactly when
 * its effect does. Heads are locked in the order of the vessels' ids, so two writers cannot wait for each other.
 * Names are committed by a salted hash and kept apart, where they can be erased. Throws `unavailable` when the
 * log cannot be written.
 */
export async function appendLog(services: Services, tx: Tx, events: readonly LogEvent[]): Promise<string[]> {
  if (events.length === 0) return [];
  try {
    return await append(services, tx, events);
  } catch (error) {
    throw unwritable(services, error);
  }
}

/**
 * What cannot be written down does not happen: a log without its rights, its space or its shape refuses the
 * whole verb. Locks that met and a database that is away are told as they are everywhere.
 */
function unwritable(services: Services, error: unknown): unknown {
  const original = error instanceof DatabaseError ? error.original : null;
  const code = original && 'code' in original ? String(original.code) : '';
  if (!/^(42|53|23|58|22|P0)/.test(code)) return error;
  services.log.error({ event: 'log_unwritable', state: code }, 'the log cannot be written');
  return new AppError(
    'unavailable',
    'The log cannot be written just now, so nothing was shown or changed. Tell whoever runs the server, then try again.',
    { cause: error },
  );
}

async function append(services: Services, tx: Tx, events: readonly LogEvent[]): Promise<string[]> {
  const { db } = services;
  const vesselIds = [...new Set(events.map((event) => event.vesselId))].sort();
  await db.run(
    tx,
    `INSERT INTO log_heads(vessel_id, seq, hash) SELECT id, 0, $genesis FROM unnest($ids::uuid[]) AS id ON CONFLICT DO NOTHING`,
    { ids: vesselIds, genesis: GENESIS },
  );
  const heads = new Map(
    (
      await db.rows<Head>(
        tx,
        'SELECT vessel_id, seq, hash FROM log_heads WHERE vessel_id = ANY($ids::uuid[]) ORDER BY vessel_id FOR UPDATE',
        { ids: vesselIds },
      )
    ).map((head) => [head.vessel_id, { seq: Number(head.seq), hash: head.hash }]),
  );
  const entries: object[] = [];
  const names: object[] = [];
  const ids: string[] = [];
  for (const event of events) {
    const head = heads.get(event.vesselId);
    if (!head) throw new Error('The log of this vessel cannot be written to');
    const id = randomUUID();
    ids.push(id);
    const body: Record<string, unknown> = { ...event.body };
    const keep = (role: 'subject' | 'actor', name: string | null | undefined) => {
      if (!name) return;
      const salt = randomBytes(16);
      body[`${role}Commitment`] = commitment(salt, name);
      names.push({ entry_id: id, role, vessel_id: event.vesselId, salt: salt.toString('hex'), name });
    };
    keep('subject', event.subject?.name);
    keep('actor', event.actor?.name);
    const fields: ChainedFields = {
      id,
      vesselId: event.vesselId,
      seq: head.seq + 1,
      at: event.at.toISOString(),
      kind: event.kind,
      networkId: event.networkId ?? null,
      passphraseId: event.passphraseId ?? null,
      subjectKind: event.subject?.kind ?? null,
      subjectId: event.subject?.id ?? null,
      actorId: event.actor?.id ?? null,
      body,
    };
    const hash = entryHash(head.hash, fields);
    entries.push({
      id,
      vessel_id: fields.vesselId,
      seq: fields.seq,
      at: fields.at,
      kind: fields.kind,
      network_id: fields.networkId,
      passphrase_id: fields.passphraseId,
      subject_kind: fields.subjectKind,
      subject_id: fields.subjectId,
      actor_id: fields.actorId,
      body,
      prev_hash: head.hash.toString('hex'),
      hash: hash.toString('hex'),
    });
    head.seq += 1;
    head.hash = hash;
  }
  await db.run(
    tx,
    `INSERT INTO log_entries(id, vessel_id, seq, at, kind, network_id, passphrase_id, subject_kind, subject_id, actor_id, body, prev_hash, hash)
     SELECT id, vessel_id, seq, at, kind, network_id, passphrase_id, subject_kind, subject_id, actor_id, body, decode(prev_hash, 'hex'), decode(hash, 'hex')
     FROM jsonb_to_recordset($entries::jsonb) AS e(id uuid, vessel_id uuid, seq bigint, at timestamptz, kind text, network_id uuid,
       passphrase_id uuid, subject_kind text, subject_id uuid, actor_id uuid, body jsonb, prev_hash text, hash text)`,
    { entries: JSON.stringify(entries) },
  );
  if (names.length > 0) {
    await db.run(
      tx,
      `INSERT INTO log_names(entry_id, role, vessel_id, salt, name)
       SELECT entry_id, role, vessel_id, decode(salt, 'hex'), name
       FROM jsonb_to_recordset($names::jsonb) AS n(entry_id uuid, role text, vessel_id uuid, salt text, name text)`,
      { names: JSON.stringify(names) },
    );
  }
  const newHeads = [...heads].map(([vesselId, head]) => ({
    vessel_id: vesselId,
    seq: head.seq,
    hash: head.hash.toString('hex'),
  }));
  await db.run(
    tx,
    `UPDATE log_heads h SET seq = n.seq, hash = decode(n.hash, 'hex')
     FROM jsonb_to_recordset($heads::jsonb) AS n(vessel_id uuid, seq bigint, hash text) WHERE h.vessel_id = n.vessel_id`,
    { heads: JSON.stringify(newHeads) },
  );
  return ids;
}
