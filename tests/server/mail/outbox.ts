import { mailTransport, sweepMail } from '../../../server/mail/sendMail.ts';
import type { Services } from '../../../server/services.ts';
import type { TestApp } from '../../support/app.ts';
import type { MailServer, Taken } from './mailServer.ts';

/** The application's services with another mail server behind them. */
export const withMail = (test: TestApp, url: string | null): Services => ({
  ...test.services,
  config: { ...test.services.config, smtpUrl: url },
});

/** Sends whatever is due through the server, as the clock's sweep would; answers what arrived by it. */
export async function deliver(test: TestApp, server: MailServer, patience?: number): Promise<Taken[]> {
  const before = server.taken.length;
  const services = withMail(test, server.url);
  await sweepMail(services, mailTransport(services, patience));
  return server.taken.slice(before);
}

/** The one-time token of a mail's link: it stands in the fragment and nowhere else. */
export function tokenOf(mail: Taken | undefined): string {
  const [, token] = /https:\/\/\S+?#([\w-]{20,})/.exec(mail?.parsed.text ?? '') ?? [];
  if (token === undefined) throw new Error('The mail holds no link with a token');
  return token;
}
