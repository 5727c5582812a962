import { afterAll, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { queueMail } from '../../../server/mail/queueMail.ts';
import { mailTransport, sendMail, sweepMail, TRIES_MAX } from '../../../server/mail/sendMail.ts';
import { useApp } from '../../support/app.ts';
import { sql } from '../auth/browser.ts';
import { type MailServer, startMailServer, startSilentServer } from './mailServer.ts';
import { deliver, tokenOf, withMail } from './outbox.ts';

const app = useApp();
const holder: { server?: MailServer } = {};
const the = (): MailServer => {
  if (!holder.server) throw new Error('no mail server yet');
  return holder.server;
};
let count = 0;

beforeAll(async () => {
  holder.server = await startMailServer();
});
afterAll(() => the().close());
beforeEach(async () => {
  the().moods = [];
  await sql(app, 'DELETE FROM mail_outbox');
});

const TOKEN = 'markertoken-0123456789-abcdefghij';

/** Queues a reset mail in a transaction of its own; answers its row's id. */
async function queued(to = 'ilse@crew.example', secret = TOKEN): Promise<string> {
  count += 1;
  const key = `password_reset:test-${count}`;
  const id = await app.services.db.transaction({ kind: 'none' }, (tx) =>
    queueMail(app.services, tx, {
      kind: 'password_reset',
      to,
      messageKey: key,
      data: { name: 'Ilse' },
      secret,
    }),
  );
  if (!id) throw new Error('not queued');
  return id;
}

interface Row {
  tries: number;
  sent_at: Date | null;
  given_up_at: Date | null;
  next_try_at: Date;
  sealed: Buffer | null;
  last_error: string | null;
}
const row = async (id: string): Promise<Row> => {
  const [found] = await sql<Row>(app, 'SELECT * FROM mail_outbox WHERE id = $id', { id });
  if (!found) throw new Error('no such mail');
  return found;
};
const jobsFor = (id: string) =>
  sql<{ data: object }>(app, "SELECT data FROM pgboss.job WHERE name = 'mail.send' AND data ->> 'id' = $id", {
    id,
  });

describe('R55: the outbox', () => {
  test('holds a mail and its job exactly when the change that asked for it was kept', async () => {
    const id = await queued();
    expect(await jobsFor(id)).toEqual([{ data: { id } }]);
    let lost = '';
    const undone = app.services.db.transaction({ kind: 'none' }, async (tx) => {
      lost =
        (await queueMail(app.services, tx, {
          kind: 'password_reset',
          to: 'ilse@crew.example',
          messageKey: 'password_reset:undone',
          data: { name: 'Ilse' },
        })) ?? '';
      throw new Error('the change fails');
    });
    await expect(undone).rejects.toThrow('the change fails');
    expect(await sql(app, 'SELECT 1 FROM mail_outbox WHERE id = $id', { id: lost })).toEqual([]);
    expect(await jobsFor(lost)).toEqual([]);
  });

  test('writes the same mail once, however often it is asked for', async () => {
    const ask = () =>
      app.services.db.transaction({ kind: 'none' }, (tx) =>
        queueMail(app.services, tx, {
          kind: 'password_changed',
          to: 'ilse@crew.example',
          messageKey: 'password_changed:same',
          data: { name: 'Ilse', at: '2026-06-14T09:00:00.000Z' },
        }),
      );
    const ids = await Promise.all([ask(), ask(), ask()]);
    expect(ids.filter((id) => id !== null)).toHaveLength(1);
    expect(await deliver(app, the())).toHaveLength(1);
    expect(await deliver(app, the())).toHaveLength(0);
  });

  test('sends once when several servers look at one moment, and wipes the token', async () => {
    const id = await queued();
    const services = withMail(app, the().url);
    const before = the().taken.length;
    const outcomes = await Promise.all(
      Array.from({ length: 5 }, () => sendMail(services, mailTransport(services), id)),
    );
    expect(outcomes.filter((outcome) => outcome === 'sent')).toHaveLength(1);
    expect(the().taken.length - before).toBe(1);
    expect(await row(id)).toMatchObject({ sealed: null, last_error: null, tries: 1 });
    expect((await row(id)).sent_at).not.toBeNull();
  });

  test.each([
    ['busy', '451'],
    ['refuse', '550'],
  ] as const)('a server that is %s (%s) is asked again later, and the mail arrives', async (mood, _reply) => {
    const id = await queued();
    the().moods = [mood];
    expect(await deliver(app, the())).toEqual([]);
    const waiting = await row(id);
    expect(waiting.tries).toBe(1);
    expect(waiting.sealed).not.toBeNull();
    expect(waiting.next_try_at.getTime()).toBeGreaterThan(app.clock.now().getTime());
    expect(await deliver(app, the())).toEqual([]);
    app.clock.set(waiting.next_try_at);
    const [mail] = await deliver(app, the());
    expect(tokenOf(mail)).toBe(TOKEN);
  });

  test('a server that takes the mail and goes away before saying so gets it again under the same Message-ID', async () => {
    const id = await queued();
    the().moods = ['drop'];
    const [first] = await deliver(app, the());
    expect((await row(id)).sent_at).toBeNull();
    app.clock.set((await row(id)).next_try_at);
    const [second] = await deliver(app, the());
    expect(second?.parsed.messageId).toBe(first?.parsed.messageId);
    expect(first?.parsed.messageId).toMatch(/^<[0-9a-f]{40}@quayword\.test>$/);
    const other = await queued();
    const [third] = await deliver(app, the());
    expect(other).not.toBe(id);
    expect(third?.parsed.messageId).not.toBe(first?.parsed.messageId);
  });

  test('a silent server, and none at all, cost one try and bounded time', async () => {
    const id = await queued();
    const silent = await startSilentServer();
    try {
      const services = withMail(app, silent.url);
      const began = performance.now();
      expect(await sendMail(services, mailTransport(services, 200), id)).toBe('later');
      expect(performance.now() - began).toBeLessThan(5_000);
    } finally {
      await silent.close();
    }
    expect((await row(id)).tries).toBe(1);
    const nothing = withMail(app, silent.url);
    expect(await sendMail(nothing, mailTransport(nothing, 200), id)).toBe('later');
    expect(await sendMail(withMail(app, null), null, id)).toBe('later');
    expect(await row(id)).toMatchObject({ tries: 3, last_error: 'NO_SMTP_URL' });
  });

  test('is given up after a bounded number of tries over about a day, shown so, and its token wiped', async () => {
    const id = await queued();
    const began = app.clock.now();
    the().moods = Array.from({ length: TRIES_MAX }, () => 'refuse' as const);
    const pauses: number[] = [];
    for (let tries = 1; tries <= TRIES_MAX; tries += 1) {
      await deliver(app, the());
      const { next_try_at } = await row(id);
      pauses.push(next_try_at.getTime() - app.clock.now().getTime());
      if (tries < TRIES_MAX) app.clock.set(next_try_at);
    }
    const hours = (app.clock.now().getTime() - began.getTime()) / 3_600_000;
    expect(hours).toBeGreaterThan(8);
    expect(hours).toBeLessThan(36);
    for (const [index, pause] of pauses.entries()) {
      const middle = Math.min(4 * 3_600_000, 30_000 * 2 ** index);
      expect(pause).toBeGreaterThanOrEqual(middle * 0.75 - 1);
      expect(pause).toBeLessThanOrEqual(middle * 1.25 + 1);
    }
    const end = await row(id);
    expect(end.given_up_at).not.toBeNull();
    expect(end.sealed).toBeNull();
    app.clock.advance(48 * 3_600_000);
    expect(await sweepMail(withMail(app, the().url), null)).toBe(0);
  });
});

describe('R43: one mailbox a mail', () => {
  test.each([
    'ilse@crew.example, second@else.example',
    'ilse@crew.example\r\nRCPT TO:<second@else.example>',
    '"second@else.example x"@crew.example',
    'Ilse <ilse@crew.example>',
    'friends:ilse@crew.example,second@else.example;',
    `${'g:'.repeat(5_000)}ilse@crew.example`,
    'ilse@crew.example\0',
  ])('%j reaches nobody', async (to) => {
    const id = await queued(to.replace('\0', ''));
    const hostile = to.includes('\0') ? 'ilse@crew .example' : to;
    await sql(app, 'UPDATE mail_outbox SET recipient = $to WHERE id = $id', { id, to: hostile });
    expect(await deliver(app, the())).toEqual([]);
    expect((await row(id)).last_error).toBe('BAD_RECIPIENT');
  });

  test('the dialogue names exactly the one recipient and our own sender', async () => {
    await queued('ilse@crew.example');
    const [mail] = await deliver(app, the());
    expect(mail?.to).toEqual(['ilse@crew.example']);
    expect(mail?.from).toBe('no-reply@quayword.example');
    expect(mail?.raw).not.toMatch(/^(cc|bcc):/im);
  });
});

describe('R28: what a token’s mail leaves behind', () => {
  test('the token is in the letter’s link only: not in its row, its job, its headers or the log', async () => {
    const id = await queued('ilse@crew.example', TOKEN);
    const text = await sql<{ all: string }>(
      app,
      'SELECT mail_outbox::text AS all FROM mail_outbox WHERE id = $id',
      { id },
    );
    const job = await sql<{ all: string }>(
      app,
      "SELECT job::text AS all FROM pgboss.job job WHERE data ->> 'id' = $id",
      { id },
    );
    for (const { all } of [...text, ...job]) {
      expect(all).not.toContain(TOKEN);
      expect(all).not.toContain(Buffer.from(TOKEN).toString('hex'));
    }
    const [mail] = await deliver(app, the());
    const [headers = ''] = (mail?.raw ?? '').split('\r\n\r\n');
    expect(headers).not.toContain(TOKEN);
    expect(mail?.parsed.text).toContain(`https://quayword.test/reset/new#${TOKEN}`);
    expect(mail?.parsed.text).not.toMatch(/[?/]markertoken/);
    expect(app.logged()).not.toContain(TOKEN);
  });
});
