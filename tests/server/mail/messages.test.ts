import { describe, expect, test } from 'vitest';
import { isMailKind, type MailData, type MailKind, writeMail } from '../../../server/mail/messages.ts';

const HOSTILE = '<b>Tam</b> & "Co"\r\nBcc: second@else.example\u202e';
const frame = { publicUrl: 'https://quayword.test', secret: 'token-0123456789-0123456789' };

const samples: { [K in MailKind]: MailData[K] } = {
  invitation: {
    name: HOSTILE,
    place: HOSTILE,
    roles: ['Purser'],
    by: HOSTILE,
    expiresAt: '2026-06-17T12:12:00.000Z',
  },
  role_given: { name: HOSTILE, place: HOSTILE, roles: ['Purser', 'ETO'], by: HOSTILE },
  password_reset: { name: HOSTILE },
  password_changed: { name: HOSTILE, at: '2026-06-14T12:12:00.000Z' },
  new_device: { name: HOSTILE, device: 'Chromium on Android', at: '2026-06-14T12:12:00.000Z' },
  change_needs_somebody: {
    vessel: HOSTILE,
    network: HOSTILE,
    dueAt: '2026-06-17T08:30:00.000Z',
    zone: 'Europe/Zagreb',
    why: 'Two access points have not been confirmed.',
    path: '/vessels/x/networks',
  },
};
const kinds = Object.keys(samples).filter(isMailKind);
const write = (kind: MailKind) => writeMail(kind, samples[kind] as never, frame);

describe('every kind of mail', () => {
  test.each(kinds)('R43: %s keeps hostile names inside their words', (kind) => {
    const { subject, text, html } = write(kind);
    expect(subject).not.toMatch(/[\r\n\u202e]/);
    expect(html).not.toContain('<b>');
    expect(html).not.toContain('\u202e');
    expect(text).not.toMatch(/^Bcc:/m);
    expect(text).not.toContain('\u202e');
    if (html.includes('Tam')) expect(html).toContain('&lt;b&gt;Tam&lt;/b&gt; &amp; &quot;Co&quot;');
  });

  test.each(kinds)('R27, R28: %s has one address, on our own host; a token only behind its #', (kind) => {
    const { text, html, subject } = write(kind);
    const links = [...html.matchAll(/href="([^"]*)"/g)].map(([, url]) => url ?? '');
    expect(links).toHaveLength(1);
    const url = new URL(links[0] ?? '');
    expect(url.origin).toBe(frame.publicUrl);
    expect(url.search).toBe('');
    expect(url.pathname).not.toContain('token');
    expect(text).toContain(links[0]);
    expect(html).not.toMatch(/<(img|script|link|iframe)|url\(/i);
    expect(subject).not.toContain(frame.secret);
  });

  test.each(kinds)('%s says the same in plain text and in HTML', (kind) => {
    const { text, html } = write(kind);
    const words = html
      .replace(/<style>.*?<\/style>|<title>.*?<\/title>/gs, '')
      .replace(/<[^>]*>/g, ' ')
      .replace(/&lt;/g, '<')
      .replace(/&gt;/g, '>')
      .replace(/&quot;/g, '"')
      .replace(/&#39;/g, "'")
      .replace(/&amp;/g, '&')
      .replace(/\s+/g, ' ');
    for (const line of text.split('\n').filter((part) => part !== '')) {
      expect(words).toContain(line.replace(/:$/, '').replace(/\s+/g, ' ').trim());
    }
  });
});

test('a change that needs somebody is told in ship’s time, with the network and without a passphrase', () => {
  const { subject, text } = writeMail(
    'change_needs_somebody',
    { ...samples.change_needs_somebody, vessel: 'Tamarisk', network: 'Tamarisk crew' },
    { ...frame, secret: null },
  );
  expect(subject).toBe('Tamarisk: the change of Tamarisk crew needs somebody');
  // Zagreb is two hours ahead of UTC in June (tzdata, CEST).
  expect(text).toContain('10:30');
  expect(text).toContain('17 June');
});
