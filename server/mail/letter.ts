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

// The day palette inline, for readers that drop style sheets; the night palette for those that keep them.
const [PAPER, INK, SOFT] = ['#fcfbf7', '#13222c', '#52626d'];
const NIGHT =
  ':root{color-scheme:light dark}@media(prefers-color-scheme:dark){.paper{background:#0b1216!important;color:#d9b778!important}' +
  '.ink{background:#d9b778!important}.rule{border-color:#d9b778!important}.soft{color:#a8926a!important}' +
  '.button{background:#5e4820!important;color:#f0d9a4!important}}';
const FOOT = 'Quayword keeps the Wi-Fi of yachts private.';

/** A short letter on the product's paper: the same words as text and as HTML, one link. */
export function letter({ subject, greeting, paragraphs, link }: Letter): Message {
  const lines = [greeting, ...paragraphs].map(oneLine);
  const text = `${lines.join('\n\n')}\n\n${link.words}:\n${link.url}\n\n${FOOT}\n`;
  const neatline = Array.from(
    { length: 12 },
    (_, index) =>
      `<td class="${index % 2 ? 'paper' : 'ink'}" style="height:6px;background:${index % 2 ? PAPER : INK}"></td>`,
  ).join('');
  const body = lines.map((line) => `<p style="margin:0 0 16px">${safe(line)}</p>`).join('');
  const html = `<!doctype html><html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width">
<meta name="color-scheme" content="light dark"><title>${safe(oneLine(subject))}</title><style>${NIGHT}</style></head>
<body class="paper" style="margin:0;background:${PAPER};color:${INK};font:16px/1.5 Lexend,Verdana,sans-serif">
<table role="presentation" class="rule" width="100%" cellspacing="0" cellpadding="0" style="border-bottom:1px solid ${INK}"><tr>${neatline}</tr></table>
<div style="max-width:560px;margin:0 auto;padding:32px 24px">${body}
<p style="margin:24px 0"><a href="${safe(link.url)}" class="button" style="display:inline-block;background:${INK};color:${PAPER};text-decoration:none;padding:12px 20px;border-radius:4px;font-weight:600">${safe(link.words)}</a></p>
<p style="margin:0;font-size:13px;overflow-wrap:anywhere">${safe(link.url)}</p>
<p class="soft" style="margin:24px 0 0;color:${SOFT};font-size:13px">${FOOT}</p></div></body></html>`;
  return { subject: oneLine(subject), text, html };
}
