import { createTransport, type Transporter } from 'nodemailer';
import { sha256 } from '../http/session.ts';
import type { Services } from '../services.ts';
import { isMailKind, type MailData, writeMail } from './messages.ts';
import { outboxPlace } from './queueMail.ts';

interface OutboxRow {
  id: string;
  kind: string;
  recipient: string;
  message_key: string;
  data: unknown;
  sealed: Buffer | null;
  key_id: string | null;
  tries: number;
}

/** Tries before a mail is given up and shown as not delivered: about a day with the growing pauses. */
export const TRIES_MAX = 12;
const FIRST_PAUSE_MS = 30_000;
const LONGEST_PAUSE_MS = 4 * 3_600_000;
const ONE_MAILBOX = /^[^\s@,;:<>()[\]"\\]{1,64}@[^\s@,;:<>()[\]"\\]{1,253}$/;

export type Send = Transporter;

/** The configured mail server, or null. `patience` is how long it may be silent, in milliseconds. */
export function mailTransport(services: Services, patience = 10_000): Send | null {
  const { smtpUrl } = services.config;
  if (!smtpUrl) return null;
  return createTransport({
    url: smtpUrl,
    connectionTimeout: patience,
    greetingTimeout: patience,
    socketTimeout: 2 * patience,
  });
}

/**
 * Sends one mail of the outbox if it is still to be sent, under lock. A mail server that is away costs nothing but
 * time; after {@link TRIES_MAX} tries it is given up and shown so. A one-time token is wiped once sent or given up.
 */
export async function sendMail(
  services: Services,
  transport: Send | null,
  id: string,
): Promise<'sent' | 'later' | 'done'> {
  const { db, config, clock } = services;
  return db.transaction({ kind: 'none' }, async (tx) => {
    const row = await db.row<OutboxRow>(
      tx,
      `SELECT id, kind, recipient, message_key, data, sealed, key_id, tries FROM mail_outbox
       WHERE id = $id AND sent_at IS NULL AND given_up_at IS NULL FOR UPDATE SKIP LOCKED`,
      { id },
    );
    if (!row) return 'done';
    const now = clock.now();
    try {
      if (!isMailKind(row.kind)) throw Object.assign(new Error('Unknown kind'), { code: 'UNKNOWN_KIND' });
      if (!transport) throw Object.assign(new Error('No mail server is set'), { code: 'NO_SMTP_URL' });
      if (!ONE_MAILBOX.test(row.recipient))
        throw Object.assign(new Error('Not one mailbox'), { code: 'BAD_RECIPIENT' });
      const secret =
        row.sealed && row.key_id
          ? services.vault.open(outboxPlace(row.id), { keyId: row.key_id, sealed: row.sealed })
          : null;
      const message = writeMail(row.kind, row.data as MailData[typeof row.kind], {
        publicUrl: config.publicUrl,
        secret,
      });
      await transport.sendMail({
        ...message,
        from: config.mailFrom,
        to: { name: '', address: row.recipient },
        envelope: { from: /<([^>]+)>/.exec(config.mailFrom)?.[1] ?? config.mailFrom, to: [row.recipient] },
        messageId: `<${sha256(row.message_key).toString('hex').slice(0, 40)}@${new URL(config.publicUrl).hostname}>`,
        disableFileAccess: true,
        disableUrlAccess: true,
      });
    } catch (error) {
      const code = error instanceof Error && 'code' in error ? String(error.code) : 'unknown';
      const tries = row.tries + 1;
      const final = tries >= TRIES_MAX;
      // Spread by a quarter either way, so that a mail server that comes back is not met by all at once.
      const pause =
        Math.min(LONGEST_PAUSE_MS, FIRST_PAUSE_MS * 2 ** (tries - 1)) * (0.75 + Math.random() / 2);
      await db.run(
        tx,
        `UPDATE mail_outbox SET tries = $tries, last_error = $code, next_try_at = $next,
           given_up_at = CASE WHEN $final THEN $now::timestamptz END, sealed = CASE WHEN $final THEN NULL ELSE sealed END WHERE id = $id`,
        { id, tries, code: code.slice(0, 60), next: new Date(now.getTime() + pause), final, now },
      );
      services.log.warn(
        { event: 'mail', kind: row.kind, tries, code },
        final ? 'mail given up' : 'mail not sent yet',
      );
      return 'later';
    }
    await db.run(
      tx,
      'UPDATE mail_outbox SET sent_at = $now, tries = tries + 1, last_error = NULL, sealed = NULL WHERE id = $id',
      { id, now },
    );
    return 'sent';
  });
}

/** Finds mails whose next try has come; run on the clock, so that a mail server away for an hour loses nothing. */
export async function sweepMail(services: Services, transport: Send | null): Promise<number> {
  const due = await services.db.transaction({ kind: 'none' }, (tx) =>
    services.db.rows<{ id: string }>(
      tx,
      'SELECT id FROM mail_outbox WHERE sent_at IS NULL AND given_up_at IS NULL AND next_try_at <= $now ORDER BY next_try_at LIMIT 100',
      { now: services.clock.now() },
    ),
  );
  for (const { id } of due) await sendMail(services, transport, id);
  return due.length;
}
