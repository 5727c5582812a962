export interface Message {
  readonly subject: string;
  readonly text: string;
  readonly html: string;
}

interface Letter {
  readonly subject: string;
  readonly greeting: string;
  readonly paragraphs: readonly string[];
  readonly link: { readonly words: string; readonly url: string };
}

const SIGNS: Record<string, string> = { '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;', "'": '&#39;' };
const safe = (text: string) => text.replace(/[&<>"']/g, (sign) => SIGNS[sign] ?? sign);
/** One line, without what could start another header or turn text round. */
const oneLine = (text: string) =>
  text.replace(/[\p{Cc}\p{Zl}\p{Zp}\u202a-\u202e\u2066-\u2069]+/gu, ' ').trim();

/** A short letter on the product's paper: the same words as text and as HTML, one link. */
export function letter({ subject, greeting, paragraphs, link }: Letter): Message {
  const lines = [greeting, ...paragraphs].map(oneLine);
  const text = `${lines.join('\n\n')}\n\n${link.words}:\n${link.url}\n\nQuayword keeps the Wi-Fi of yachts private.\n`;
  const neatline = Array.from(
    { length: 12 },
    (_, index) => `<td style="height:6px;background:${index % 2 ? '#FCFBF7' : '#13222C'}"></td>`,
  ).join('');
  const body = lines.map((line) => `<p style="margin:0 0 16px">${safe(line)}</p>`).join('');
  const html = `<!doctype html><html lang="en"><head><meta charset="utf-8"><meta name="color-scheme" content="light"><title>${safe(oneLine(subject))}</title></head>
<body style="margin:0;background:#FCFBF7;color:#13222C;font:16px/1.5 Lexend,Verdana,sans-serif">
<table role="presentation" width="100%" cellspacing="0" cellpadding="0" style="border-bottom:1px solid #13222C"><tr>${neatline}</tr></table>
<div style="max-width:560px;margin:0 auto;padding:32px 24px">${body}
<p style="margin:24px 0"><a href="${safe(link.url)}" style="display:inline-block;background:#13222C;color:#FCFBF7;text-decoration:none;padding:12px 20px;border-radius:4px;font-weight:600">${safe(link.words)}</a></p>
<p style="margin:24px 0 0;color:#52626D;font-size:13px">Quayword keeps the Wi-Fi of yachts private.</p></div></body></html>`;
  return { subject: oneLine(subject), text, html };
}
