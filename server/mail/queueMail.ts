import { randomUUID } from 'node:crypto';
import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';
import type { MailData, MailKind } from './messages.ts';

export interface NewMail<K extends MailKind = MailKind> {
  readonly kind: K;
  /** One validated mailbox. */
  readonly to: string;
  /** (kind, subject, recipient): a repeat is the same mail and is sent once. */
  readonly messageKey: string;
  readonly data: MailData[K];
  /** A one-time token for the mail's link: lies sealed until sent, then nowhere. */
  readonly secret?: string;
  readonly vesselId?: string | null;
}

export const outboxPlace = (id: string) => ({ table: 'mail_outbox', column: 'sealed', rowId: id });

/** Writes a mail down in the verb's transaction; it is sent after the commit, once, and tried again for a day. */
export async function queueMail<K extends MailKind>(
  services: Services,
  tx: Tx,
  mail: NewMail<K>,
): Promise<string | null> {
  const id = randomUUID();
  const hidden = mail.secret === undefined ? null : services.vault.seal(outboxPlace(id), mail.secret);
  const written = await services.db.run(
    tx,
    `INSERT INTO mail_outbox(id, vessel_id, kind, recipient, message_key, data, sealed, key_id, next_try_at, created_at)
     VALUES ($id, $vessel, $kind, $to, $key, $data, $sealed, $keyId, $now, $now) ON CONFLICT (message_key) DO NOTHING RETURNING 1`,
    {
      id,
      vessel: mail.vesselId ?? null,
      kind: mail.kind,
      to: mail.to,
      key: mail.messageKey,
      data: JSON.stringify(mail.data),
      sealed: hidden?.sealed ?? null,
      keyId: hidden?.keyId ?? null,
      now: services.clock.now(),
    },
  );
  if (written.length === 0) return null;
  await services.enqueue(tx, 'mail.send', { id });
  return id;
}
