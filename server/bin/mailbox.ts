import { createServer } from 'node:http';
import { simpleParser } from 'mailparser';
import { SMTPServer } from 'smtp-server';

/**
 * The demo's mailbox: takes every mail of this machine over real SMTP and shows it on a page. Nothing is sent on,
 * and nothing is kept when it stops. Loopback only.
 */

interface Mail {
  readonly number: number;
  readonly at: Date;
  readonly from: string;
  readonly to: string;
  readonly subject: string;
  readonly text: string;
  readonly html: string;
}

const KEPT = 200;
const mails: Mail[] = [];
let count = 0;

const smtp = new SMTPServer({
  authOptional: true,
  disabledCommands: ['STARTTLS'],
  size: 2_000_000,
  onData(stream, session, done) {
    simpleParser(stream).then(
      (parsed) => {
        count += 1;
        mails.unshift({
          number: count,
          at: new Date(),
          from: parsed.from?.text ?? '',
          to: session.envelope.rcptTo.map(({ address }) => address).join(', '),
          subject: parsed.subject ?? '(no subject)',
          text: parsed.text ?? '',
          html: parsed.html || '',
        });
        mails.length = Math.min(mails.length, KEPT);
        done();
      },
      (error: Error) => done(error),
    );
  },
});

const plain = (text: string) => text.replace(/[&<>"']/g, (sign) => `&#${sign.charCodeAt(0)};`);

const page = (
  title: string,
  body: string,
) => `<!doctype html><html lang="en"><meta charset="utf-8"><title>${plain(title)}</title>
<meta name="viewport" content="width=device-width, initial-scale=1"><style>
:root{color-scheme:light dark}body{font:15px/1.5 system-ui,sans-serif;margin:0 auto;max-width:52rem;padding:1.5rem}
a{color:inherit}li{border-bottom:1px solid #8886;padding:.6rem 0}ol{list-style:none;padding:0}small{opacity:.75}
pre{white-space:pre-wrap;font:inherit}iframe{width:100%;height:36rem;border:1px solid #8886;background:#fff}</style>${body}`;

function list(): string {
  const rows = mails.map(
    (mail) =>
      `<li><a href="/${mail.number}">${plain(mail.subject)}</a><br><small>to ${plain(mail.to)}, ${mail.at.toISOString().slice(11, 16)} UTC</small></li>`,
  );
  return page(
    'Mailbox',
    `<h1>Mailbox</h1><p>Every mail this machine's Quayword sends, newest first.</p><ol>${rows.join('') || '<li>No mail yet.</li>'}</ol>`,
  );
}

function one(mail: Mail): string {
  const frame = mail.html
    ? `<iframe sandbox="allow-popups" title="The mail as its reader sees it" srcdoc="${plain(mail.html)}"></iframe>`
    : '';
  return page(
    mail.subject,
    `<p><a href="/">Mailbox</a></p><h1>${plain(mail.subject)}</h1><p>From ${plain(mail.from)} to ${plain(mail.to)}</p>${frame}<h2>As plain text</h2><pre>${linked(mail.text)}</pre>`,
  );
}

const linked = (text: string) =>
  plain(text).replace(
    /https?:&#47;&#47;\S+|https?:\/\/[^\s<]+/g,
    (url) => `<a href="${url}" rel="noreferrer">${url}</a>`,
  );

const web = createServer((request, response) => {
  const number = Number((request.url ?? '/').slice(1));
  const mail = mails.find((known) => known.number === number);
  const found = request.url === '/' || mail !== undefined;
  response.writeHead(found ? 200 : 404, {
    'Content-Type': 'text/html; charset=utf-8',
    'Cache-Control': 'no-store',
  });
  response.end(
    mail
      ? one(mail)
      : found
        ? list()
        : page('Not found', '<p>There is no such mail. <a href="/">Mailbox</a></p>'),
  );
});

smtp.listen(Number(process.env.SMTP_PORT ?? 4182), '127.0.0.1');
web.listen(Number(process.env.MAILBOX_PORT ?? 4181), '127.0.0.1');
for (const signal of ['SIGINT', 'SIGTERM'] as const) {
  process.on(signal, () => {
    smtp.close(() => undefined);
    web.close();
    web.closeAllConnections();
    process.exit(0);
  });
}
