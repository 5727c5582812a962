import { Temporal } from 'temporal-polyfill';
import { letter, type Message } from './letter.ts';

/** What each kind of mail is told. Never a passphrase, never a guest's name. */
export interface MailData {
  invitation: {
    readonly name: string | null;
    readonly place: string;
    readonly roles: readonly string[];
    readonly by: string;
    readonly expiresAt: string;
  };
  role_given: {
    readonly name: string;
    readonly place: string;
    readonly roles: readonly string[];
    readonly by: string;
  };
  password_reset: { readonly name: string };
  password_changed: { readonly name: string; readonly at: string };
  new_device: { readonly name: string; readonly device: string; readonly at: string };
  change_needs_somebody: {
    readonly vessel: string;
    readonly network: string;
    readonly dueAt: string;
    readonly zone: string;
    readonly why: string;
    readonly path: string;
  };
}
export type MailKind = keyof MailData;

interface Frame {
  readonly publicUrl: string;
  /** The mail's one-time token, if it has one. Only ever in a link's fragment, which is sent to no server. */
  readonly secret: string | null;
}

type Writers = { readonly [K in MailKind]: (data: MailData[K], frame: Frame) => Message };

const utc = (at: string) => `${at.slice(0, 10)} ${at.slice(11, 16)} UTC`;

/** "Wed 17 June 10:30" in ship's time. */
function shipTime(at: string, zone: string): string {
  return Temporal.Instant.from(at).toZonedDateTimeISO(zone).toLocaleString('en-GB', {
    weekday: 'short',
    day: 'numeric',
    month: 'long',
    hour: '2-digit',
    minute: '2-digit',
    hourCycle: 'h23',
  });
}

const writers: Writers = {
  invitation: (data, { publicUrl, secret }) =>
    letter({
      subject: `Your place on ${data.place} in Quayword`,
      greeting: data.name ? `Dear ${data.name},` : 'Hello,',
      paragraphs: [
        `${data.by} invites you to look after the Wi-Fi of ${data.place} in Quayword, as ${data.roles.join(', ')}.`,
        `The link below works once, until ${utc(data.expiresAt)}. If you do not know what this is about, leave it alone and nothing happens.`,
      ],
      link: { words: 'Accept the invitation', url: `${publicUrl}/invitation#${secret ?? ''}` },
    }),
  role_given: (data, { publicUrl }) =>
    letter({
      subject: `Your role on ${data.place} in Quayword`,
      greeting: `Dear ${data.name},`,
      paragraphs: [`${data.by} gave you another role on ${data.place}: ${data.roles.join(', ')}.`],
      link: { words: 'Open Quayword', url: publicUrl },
    }),
  password_reset: (data, { publicUrl, secret }) =>
    letter({
      subject: 'Set a new password for Quayword',
      greeting: `Dear ${data.name},`,
      paragraphs: [
        'Somebody, we hope you, asked for a new password. The link below works once, for 15 minutes.',
        'If it was not you, leave it alone: your password stays as it is.',
      ],
      link: { words: 'Set a new password', url: `${publicUrl}/reset/new#${secret ?? ''}` },
    }),
  password_changed: (data, { publicUrl }) =>
    letter({
      subject: 'Your Quayword password was changed',
      greeting: `Dear ${data.name},`,
      paragraphs: [
        `Your password was changed at ${utc(data.at)}, and every other place you were signed in was signed out.`,
        'If it was not you, set a new one now and tell your captain or dealer.',
      ],
      link: { words: 'Set a new password', url: `${publicUrl}/reset` },
    }),
  new_device: (data, { publicUrl }) =>
    letter({
      subject: 'A new sign-in to Quayword',
      greeting: `Dear ${data.name},`,
      paragraphs: [
        `You signed in with ${data.device} at ${utc(data.at)}, for the first time with that browser.`,
        'If it was not you, change your password and sign out everywhere on your account page.',
      ],
      link: { words: 'Open your account', url: `${publicUrl}/account` },
    }),
  change_needs_somebody: (data, { publicUrl }) =>
    letter({
      subject: `${data.vessel}: the change of ${data.network} needs somebody`,
      greeting: 'Hello,',
      paragraphs: [
        `The passphrase of ${data.network} was to change ${shipTime(data.dueAt, data.zone)}, ship's time.`,
        data.why,
        'The new passphrase is not in this mail, and never will be in any: open the entry sheet aboard.',
      ],
      link: { words: 'Open Quayword', url: `${publicUrl}${data.path}` },
    }),
};

/** The finished mail of a kind. */
export function writeMail<K extends MailKind>(kind: K, data: MailData[K], frame: Frame): Message {
  return writers[kind](data, frame);
}

export const isMailKind = (kind: string): kind is MailKind => kind in writers;
