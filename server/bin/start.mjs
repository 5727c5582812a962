import { existsSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { databaseForServer, serverEnvironment } from './environment.mjs';
import {
  checkNode,
  clientUp,
  DATA,
  main,
  orderlyEnd,
  packagesUp,
  portFrom,
  portTaken,
  runToEnd,
  SetUpError,
  say,
  sentenceOf,
  startChild,
} from './setUp.mjs';

const HEALTHY_WITHIN_MS = 60_000;
const TSX = ['--import', 'tsx'];
const dev = process.argv.includes('--dev');
const production = process.env.NODE_ENV === 'production';

// `npm start` and `npm run dev`: from nothing to a running Quayword, and everything ended again on Ctrl-C.
await main(async () => {
  checkNode();
  const host = process.env.HOST ?? '127.0.0.1';
  const port = portFrom('PORT', 4180);
  const mailboxPort = portFrom('MAILBOX_PORT', port + 1);
  const ports = {
    port,
    mailboxPort,
    smtpPort: mailboxPort + 1,
    apiPort: dev ? portFrom('API_PORT', port + 9) : port,
  };
  const ownMail = !production && !process.env.SMTP_URL;
  await portsFree(ports, host, ownMail);

  const children = [];
  const end = orderlyEnd({ children });
  end.onSignals(() => 0);
  try {
    await packagesUp({ children });
    say('Starting the database…');
    const starting = databaseForServer();
    end.last(() => starting.then((database) => database.stop()).catch(() => undefined));
    const database = await starting;
    const env = serverEnvironment(database, {
      MAILBOX_PORT: String(mailboxPort),
      PUBLIC_URL: `http://localhost:${port}`,
      ...(ownMail ? { SMTP_URL: `smtp://127.0.0.1:${ports.smtpPort}` } : {}),
    });
    const demo = env.DEMO === '1' && !production;
    await prepare(env, demo, children);
    if (end.isStopping()) return;
    startAll({ env, ports, host, ownMail, children, end });
    await healthy(host, ports.apiPort, end.isStopping);
    if (!end.isStopping())
      greet({ address: env.PUBLIC_URL, mailboxPort: ownMail ? mailboxPort : null, demo });
  } catch (error) {
    if (!end.isStopping()) process.stderr.write(`${sentenceOf(error)}\n`);
    await end.stop(1);
  }
});

async function portsFree({ port, mailboxPort, smtpPort, apiPort }, host, ownMail) {
  const command = dev ? 'npm run dev' : 'npm start';
  if (await portTaken(port, host))
    throw new SetUpError(
      `Port ${port} is in use by another program. End that one, or choose another:  PORT=${port + 100} ${command}`,
    );
  if (dev && (await portTaken(apiPort, host)))
    throw new SetUpError(
      `Port ${apiPort}, for the server behind the client, is in use. Choose another:  API_PORT=${apiPort + 100} ${command}`,
    );
  if (!ownMail) return;
  for (const one of [mailboxPort, smtpPort])
    if (await portTaken(one, '127.0.0.1'))
      throw new SetUpError(
        `Port ${one}, for the demo's mailbox, is in use. Choose another:  MAILBOX_PORT=${mailboxPort + 100} ${command}`,
      );
}

/** Migrates, lays the demo fleet on the first run, and builds the client. */
async function prepare(env, demo, children) {
  await runToEnd(
    [...TSX, 'server/bin/migrate.ts'],
    env,
    'The database could not be brought up to date. The lines above say why.',
    { children },
  );
  if (demo)
    await runToEnd(
      [...TSX, 'server/bin/seed.ts'],
      env,
      'The demo fleet could not be laid. The lines above say why.',
      { children },
    );
  if (!dev) await clientUp({ children });
}

/** Starts what keeps running. Should one of them end by itself, everything ends. */
function startAll({ env, ports, host, ownMail, children, end }) {
  const keep = (name, args, more = {}) => {
    const child = startChild(args, { ...env, ...more }, { children });
    child.once('exit', (code, signal) => {
      if (end.isStopping()) return;
      process.stderr.write(
        `The ${name} ended by itself (${signal ?? `code ${code}`}); the lines above may say why. Stopping the rest.\n`,
      );
      void end.stop(1);
    });
  };
  if (ownMail) keep('mailbox', [...TSX, 'server/bin/mailbox.ts'], { SMTP_PORT: String(ports.smtpPort) });
  keep('server', [...(dev ? ['--watch'] : []), ...TSX, 'server/main.ts'], { PORT: String(ports.apiPort) });
  if (dev)
    keep(
      'client',
      ['node_modules/vite/bin/vite.js', '--host', host, '--port', String(ports.port), '--strictPort'],
      { API_PORT: String(ports.apiPort) },
    );
}

/** Waits until the server answers that it and its database are well. */
async function healthy(host, port, stopped) {
  const reached = { '0.0.0.0': '127.0.0.1', '::': '[::1]' }[host] ?? host;
  const until = Date.now() + HEALTHY_WITHIN_MS;
  while (!stopped()) {
    const well = await fetch(`http://${reached}:${port}/api/health`).then(
      (response) => response.status === 200,
      () => false,
    );
    if (well) return;
    if (Date.now() > until)
      throw new SetUpError(
        `The server did not answer within ${HEALTHY_WITHIN_MS / 1000} seconds. The lines above may say why.`,
      );
    await new Promise((resolve) => setTimeout(resolve, 100));
  }
}

function greet({ address, mailboxPort, demo }) {
  say(`\nQuayword is at  ${address}\n`);
  const file = path.join(DATA, 'demo.json');
  if (demo && existsSync(file)) {
    const { people } = JSON.parse(readFileSync(file, 'utf8'));
    say('Invented people to sign in as, on this machine only:\n');
    const width = (key) => Math.max(...people.map((person) => String(person[key]).length));
    for (const person of people) {
      const columns = ['email', 'password', 'name'].map((key) => String(person[key]).padEnd(width(key)));
      say(`  ${columns.join('  ')}  ${person.role}, ${person.vessel}`);
    }
  }
  if (mailboxPort !== null) say(`\nMail lands in  http://localhost:${mailboxPort}\n`);
  say('Ctrl-C stops everything.');
}
