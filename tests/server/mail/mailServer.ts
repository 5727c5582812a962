import { type AddressInfo, createServer } from 'node:net';
import { type ParsedMail, simpleParser } from 'mailparser';
import { SMTPServer } from 'smtp-server';

/** One mail as the server met it: the envelope of the dialogue, the octets, and the parsed letter. */
export interface Taken {
  readonly from: string;
  readonly to: readonly string[];
  readonly raw: string;
  readonly parsed: ParsedMail;
}

/** What the server does with each mail, in order; `take` once the list is used up. */
export type Mood = 'take' | 'busy' | 'refuse' | 'drop';

export interface MailServer {
  readonly url: string;
  readonly taken: Taken[];
  moods: Mood[];
  close(): Promise<void>;
}

class Refusal extends Error {
  constructor(
    message: string,
    readonly responseCode: number,
  ) {
    super(message);
  }
}

/** A real SMTP server on loopback (RFC 5321), with moods. */
export async function startMailServer(): Promise<MailServer> {
  const taken: Taken[] = [];
  const state: { moods: Mood[] } = { moods: [] };
  const server = new SMTPServer({
    authOptional: true,
    disabledCommands: ['STARTTLS'],
    onRcptTo(_address, _session, done) {
      if (state.moods[0] === 'busy' || state.moods[0] === 'refuse') {
        const mood = state.moods.shift();
        done(mood === 'busy' ? new Refusal('Mailbox busy', 451) : new Refusal('No such mailbox', 550));
        return;
      }
      done();
    },
    onData(stream, session, done) {
      const chunks: Buffer[] = [];
      stream.on('data', (chunk: Buffer) => chunks.push(chunk));
      stream.on('end', async () => {
        const raw = Buffer.concat(chunks).toString('utf8');
        const { mailFrom, rcptTo } = session.envelope;
        taken.push({
          from: mailFrom ? mailFrom.address : '',
          to: rcptTo.map(({ address }) => address),
          raw,
          parsed: await simpleParser(raw),
        });
        if (state.moods[0] === 'drop') {
          state.moods.shift();
          for (const connection of server.connections) connection.close();
          return;
        }
        done();
      });
    },
  });
  server.on('error', () => undefined);
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  const { port } = server.server.address() as AddressInfo;
  return {
    url: `smtp://127.0.0.1:${port}`,
    taken,
    get moods() {
      return state.moods;
    },
    set moods(moods) {
      state.moods = moods;
    },
    close: () => new Promise<void>((resolve) => server.close(() => resolve())),
  };
}

/** A server that takes connections and never says a word. */
export async function startSilentServer(): Promise<{ url: string; close(): Promise<void> }> {
  const sockets = new Set<import('node:net').Socket>();
  const server = createServer((socket) => sockets.add(socket.on('error', () => undefined)));
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  return {
    url: `smtp://127.0.0.1:${(server.address() as AddressInfo).port}`,
    close: () =>
      new Promise<void>((resolve) => {
        for (const socket of sockets) socket.destroy();
        server.close(() => resolve());
      }),
  };
}
