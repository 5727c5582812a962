import { mkdir, readdir, readFile, rm, writeFile } from 'node:fs/promises';
import { createServer, type IncomingMessage, type ServerResponse } from 'node:http';
import path from 'node:path';
import { simpleParser } from 'mailparser';
import { SMTPServer } from 'smtp-server';
import { mailListPage, mailPage, notFoundPage, type ShownMail } from './mailboxPages.ts';

/**
 * The demo's mailbox: takes every mail of this machine over real SMTP, keeps the newest as `.eml` files that their
 * owner alone can read, and shows them on a page. Nothing is sent on. Loopback only.
 */

const KEPT = 200;
const LARGEST_BYTES = 2_000_000;
const folder = path.join(process.env.DATA_DIR ?? '.data', 'mail');
const smtpPort = Number(process.env.SMTP_PORT ?? 4182);
const webPort = Number(process.env.MAILBOX_PORT ?? 4181);
const mails: ShownMail[] = [];

/** A mail's file: its number, then the instant it came in milliseconds since 1970. */
const fileOf = (number: number, at: Date) => `${String(number).padStart(6, '0')}-${at.getTime()}.eml`;

async function show(raw: Buffer, number: number, at: Date): Promise<void> {
  const parsed = await simpleParser(raw);
  const to = [parsed.to ?? []].flat().map((one) => one.text);
  mails.unshift({
    number,
    at,
    from: parsed.from?.text ?? '',
    to: to.join(', '),
    subject: parsed.subject ?? '(no subject)',
    text: parsed.text ?? '',
    html: parsed.html || '',
  });
}

async function take(raw: Buffer): Promise<void> {
  const number = (mails[0]?.number ?? 0) + 1;
  const at = new Date();
  await show(raw, number, at);
  await writeFile(path.join(folder, fileOf(number, at)), raw, { mode: 0o600 });
  for (const old of mails.splice(KEPT))
    await rm(path.join(folder, fileOf(old.number, old.at)), { force: true });
}

async function readKept(): Promise<void> {
  await mkdir(folder, { recursive: true, mode: 0o700 });
  for (const name of (await readdir(folder)).sort()) {
    const [, number, at] = /^(\d{6})-(\d+)\.eml$/.exec(name) ?? [];
    if (number && at)
      await show(await readFile(path.join(folder, name)), Number(number), new Date(Number(at)));
  }
}

/** One mail after the other, so that their numbers follow the order in which they came. */
let taking: Promise<void> = Promise.resolve();

const smtp = new SMTPServer({
  authOptional: true,
  disabledCommands: ['STARTTLS'],
  size: LARGEST_BYTES,
  onData(stream, _session, done) {
    const parts: Buffer[] = [];
    stream.on('data', (part: Buffer) => parts.push(part));
    stream.once('end', () => {
      if (stream.sizeExceeded) {
        done(Object.assign(new Error('The mail is too large'), { responseCode: 552 }));
        return;
      }
      taking = taking
        .then(() => take(Buffer.concat(parts)))
        .then(
          () => done(),
          (error: Error) => done(error),
        );
    });
  },
});

/** Another site's page must not read these mails by pointing its own name at this machine. */
const isLocal = (host = '') => /^(localhost|127\.0\.0\.1|\[::1\])(:\d+)?$/.test(host);

function answer(request: IncomingMessage, response: ServerResponse): void {
  const mail = mails.find((known) => request.url === `/${known.number}`);
  const local = isLocal(request.headers.host);
  const body = !local ? null : request.url === '/' ? mailListPage(mails) : mail ? mailPage(mail) : null;
  response.writeHead(body === null ? (local ? 404 : 421) : 200, {
    'Content-Type': 'text/html; charset=utf-8',
    'Cache-Control': 'no-store',
    'Referrer-Policy': 'no-referrer',
    'X-Content-Type-Options': 'nosniff',
    'Content-Security-Policy':
      "default-src 'none'; style-src 'unsafe-inline'; img-src data:; frame-src 'self'; frame-ancestors 'none'",
  });
  response.end(body ?? notFoundPage());
}

await readKept();
const web = createServer(answer);
for (const one of [smtp, web]) {
  one.on('error', (error: Error) => {
    process.stderr.write(`The mailbox: ${error.message}\n`);
    if ('syscall' in error && error.syscall === 'listen') process.exit(1);
  });
}
smtp.listen(smtpPort, '127.0.0.1');
web.listen(webPort, '127.0.0.1');
for (const signal of ['SIGINT', 'SIGTERM'] as const) {
  process.once(signal, () => {
    smtp.close(() => undefined);
    web.close();
    web.closeAllConnections();
    void taking.finally(() => process.exit(0));
  });
}
