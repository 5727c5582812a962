import { spawn } from 'node:child_process';
import { existsSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { databaseForServer } from './serverDatabase.mjs';
import {
  checkNode,
  clientUp,
  DATA,
  main,
  packagesUp,
  portTaken,
  ROOT,
  runToEnd,
  SetUpError,
  say,
  serverEnvironment,
} from './setUp.mjs';

const dev = process.argv.includes('--dev');
const production = process.env.NODE_ENV === 'production';

await main(async () => {
  checkNode();
  const port = Number(process.env.PORT ?? 4180);
  const mailboxPort = Number(process.env.MAILBOX_PORT ?? port + 1);
  const host = process.env.HOST ?? '127.0.0.1';
  if (await portTaken(port, host)) {
    throw new SetUpError(
      `Port ${port} is in use by another program. End that one, or choose another:  PORT=4280 npm start`,
    );
  }
  packagesUp();
  say('Starting the database…');
  const database = await databaseForServer();
  const children = [];
  let stopping = null;
  const stop = (code) => {
    stopping ??= (async () => {
      for (const child of children.reverse()) await end(child);
      await database.stop();
      process.exit(code);
    })();
    return stopping;
  };
  process.on('SIGINT', () => void stop(0));
  process.on('SIGTERM', () => void stop(0));
  try {
    const ownMail = !production && !process.env.SMTP_URL;
    const smtpPort = mailboxPort + 1;
    if (
      ownMail &&
      ((await portTaken(mailboxPort, '127.0.0.1')) || (await portTaken(smtpPort, '127.0.0.1')))
    ) {
      throw new SetUpError(
        `Ports ${mailboxPort} and ${smtpPort}, for the demo's mailbox, are in use. Choose another:  MAILBOX_PORT=4290 npm start`,
      );
    }
    const env = serverEnvironment(database, {
      MAILBOX_PORT: String(mailboxPort),
      ...(ownMail ? { SMTP_URL: `smtp://127.0.0.1:${smtpPort}` } : {}),
      ...(dev ? { PUBLIC_URL: `http://localhost:${port}` } : {}),
    });
    const tsx = ['--import', 'tsx'];
    await runToEnd(
      [...tsx, 'server/bin/migrate.ts'],
      env,
      'The database could not be brought up to date. The lines above say why.',
    );
    if (env.DEMO === '1' && !production)
      await runToEnd(
        [...tsx, 'server/bin/seed.ts'],
        env,
        'The demo fleet could not be laid. The lines above say why.',
      );
    if (!dev) await clientUp();

    const child = (name, args, childEnv) => {
      const started = spawn(process.execPath, args, { cwd: ROOT, env: childEnv, stdio: 'inherit' });
      children.push(started);
      started.once('exit', (code) => {
        if (stopping) return;
        process.stderr.write(`The ${name} ended by itself (${code}). Stopping.\n`);
        void stop(1);
      });
      return started;
    };
    if (ownMail) child('mailbox', [...tsx, 'server/bin/mailbox.ts'], { ...env, SMTP_PORT: String(smtpPort) });
    const apiPort = dev ? port + 9 : port;
    child('server', [...(dev ? ['--watch'] : []), ...tsx, 'server/main.ts'], {
      ...env,
      PORT: String(apiPort),
      PUBLIC_URL: env.PUBLIC_URL ?? `http://localhost:${port}`,
    });
    if (dev)
      child('client', ['node_modules/vite/bin/vite.js', '--port', String(port), '--strictPort'], {
        ...env,
        API_PORT: String(apiPort),
      });
    await healthy(
      `http://${host === '0.0.0.0' ? '127.0.0.1' : host}:${apiPort}/api/health`,
      () => stopping !== null,
    );
    greet({ port, mailboxPort: ownMail ? mailboxPort : null, demo: env.DEMO === '1' && !production });
  } catch (error) {
    process.stderr.write(error instanceof SetUpError ? `${error.message}\n` : `${error?.stack ?? error}\n`);
    await stop(1);
  }
});

function end(child) {
  if (child.exitCode !== null || child.signalCode !== null) return Promise.resolve();
  return new Promise((resolve) => {
    child.once('exit', resolve);
    child.kill('SIGTERM');
    setTimeout(() => child.kill('SIGKILL'), 15_000).unref();
  });
}

/** Waits until the server answers; gives up after a minute. */
async function healthy(url, stopped) {
  const until = Date.now() + 60_000;
  while (Date.now() < until && !stopped()) {
    try {
      if ((await fetch(url)).status === 200) return;
    } catch {}
    await new Promise((resolve) => setTimeout(resolve, 200));
  }
  if (!stopped())
    throw new SetUpError('The server did not answer within a minute. The lines above may say why.');
}

function greet({ port, mailboxPort, demo }) {
  say(`\nQuayword is at  http://localhost:${port}\n`);
  const file = path.join(DATA, 'demo.json');
  if (demo && existsSync(file)) {
    say('Demo people (invented), for this machine only:');
    const { people } = JSON.parse(readFileSync(file, 'utf8'));
    const width = (key) => Math.max(...people.map((person) => String(person[key]).length));
    for (const person of people) {
      say(
        `  ${person.email.padEnd(width('email'))}  ${person.password.padEnd(width('password'))}  ${person.name.padEnd(width('name'))}  ${person.role}, ${person.vessel}`,
      );
    }
  }
  if (mailboxPort !== null) say(`\nMail lands in  http://localhost:${mailboxPort}\n`);
  say('Ctrl-C stops everything.');
}
