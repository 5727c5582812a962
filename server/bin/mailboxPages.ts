/** One mail as the demo's mailbox shows it. */
export interface ShownMail {
  readonly number: number;
  readonly at: Date;
  readonly from: string;
  readonly to: string;
  readonly subject: string;
  readonly text: string;
  readonly html: string;
}

/** Text that can stand in HTML and in an attribute. */
const plain = (text: string) => text.replace(/[&<>"']/g, (sign) => `&#${sign.charCodeAt(0)};`);

/** Plain text with its addresses made into links. */
const linked = (text: string) =>
  text
    .split(/(https?:\/\/[^\s<>"]+)/)
    .map((part, index) => (index % 2 === 1 ? `<a href="${plain(part)}">${plain(part)}</a>` : plain(part)))
    .join('');

const page = (
  title: string,
  body: string,
) => `<!doctype html><html lang="en"><meta charset="utf-8"><title>${plain(title)}</title>
<meta name="viewport" content="width=device-width, initial-scale=1"><style>
:root{color-scheme:light dark}body{font:15px/1.5 system-ui,sans-serif;margin:0 auto;max-width:52rem;padding:1.5rem}
a{color:inherit}li{border-bottom:1px solid #8886;padding:.6rem 0}ol{list-style:none;padding:0}
pre{white-space:pre-wrap;overflow-wrap:anywhere;font:inherit}
iframe{width:100%;height:36rem;border:1px solid #8886;background:#fff}</style><main>${body}</main></html>`;

/** Every mail, newest first. */
export function mailListPage(mails: readonly ShownMail[]): string {
  const rows = mails.map(
    (mail) =>
      `<li><a href="/${mail.number}">${plain(mail.subject)}</a><br>to ${plain(mail.to)}, ${mail.at.toISOString().slice(0, 16).replace('T', ' ')} UTC</li>`,
  );
  return page(
    'Mailbox',
    `<h1>Mailbox</h1><p>Every mail this machine's Quayword sends, newest first.</p><ol>${rows.join('') || '<li>No mail yet.</li>'}</ol>`,
  );
}

/** One mail: its HTML in a frame that runs no script and whose links open a new tab, and its plain text. */
export function mailPage(mail: ShownMail): string {
  const inside = `<base target="_blank">${mail.html}`;
  const frame = mail.html
    ? `<iframe sandbox="allow-popups allow-popups-to-escape-sandbox" title="The mail as its reader sees it" srcdoc="${plain(inside)}"></iframe>`
    : '';
  return page(
    mail.subject,
    `<p><a href="/">Mailbox</a></p><h1>${plain(mail.subject)}</h1><p>From ${plain(mail.from)} to ${plain(mail.to)}</p>${frame}<h2>As plain text</h2><pre>${linked(mail.text)}</pre>`,
  );
}

/** What is said of an address that shows no mail. */
export const notFoundPage = () =>
  page('Not found', '<h1>Not found</h1><p>There is no such mail here. <a href="/">Mailbox</a></p>');
