import { existsSync, readdirSync, renameSync } from 'node:fs';
import path from 'node:path';
import { createTransport } from 'nodemailer';
import { afterAll, beforeAll, describe, expect, inject, test } from 'vitest';
import { checkNode, SetUpError } from '../../server/bin/setUp.mjs';
import { ask, freePorts, listening, quickDatabase, said, started, testFolder } from '../support/programs.ts';

// The project's own rule for its standing commands: each explains itself when something is missing.

const folder = testFolder();

describe('a command that cannot start says what to do', () => {
  test('with an old Node.js', () => {
    for (const version of ['18.20.8', '20.18.3', '20.9.0'])
      expect(() => checkNode(version)).toThrow(
        new SetUpError(
          `This is Node.js ${version}; Quayword needs 20.19.0 or newer. Install it, then run the command again.`,
        ),
      );
    for (const version of ['20.19.0', '20.20.2', '22.0.0']) expect(() => checkNode(version)).not.toThrow();
  });

  test('with its port taken, or no port at all', async () => {
    const { server, port } = await listening();
    try {
      const busy = await started(['server/bin/start.mjs'], { PORT: String(port) }).ended;
      expect(busy).toEqual({
        code: 1,
        out: `Port ${port} is in use by another program. End that one, or choose another:  PORT=${port + 100} npm start\n`,
      });
      const mail = await started(['server/bin/start.mjs'], {
        PORT: String(await freePorts(1)),
        MAILBOX_PORT: String(port),
      }).ended;
      expect(mail.code).toBe(1);
      expect(mail.out).toContain(`Port ${port}, for the demo's mailbox, is in use.`);
    } finally {
      server.close();
    }
    const none = await started(['server/bin/start.mjs'], { PORT: 'four' }).ended;
    expect(none).toEqual({ code: 1, out: 'PORT is "four"; it must be a whole number from 1 to 65535.\n' });
  });

  test('with a program that is not there', async () => {
    const gone = await started(['server/bin/run.mjs', 'server/nowhere.ts']).ended;
    expect(gone.code).toBe(1);
    expect(gone.out).toContain('no server/nowhere.ts');
  });
});

describe("somebody's own server, named by DATABASE_URL", () => {
  const name = `qw_test_own_${process.pid}_${Math.floor(Date.now() / 1000).toString(36)}`;
  const plain = `qw_plain_${process.pid}`;
  const password = 'a-password-of-this-test';
  const own = (changes: (url: URL) => void) => {
    const url = new URL(inject('ownerUrl'));
    url.pathname = `/${name}`;
    changes(url);
    return url.href;
  };
  const onServer = (sql: string) =>
    ask(
      own((url) => (url.pathname = '/postgres')),
      sql,
    );
  const use = (env: NodeJS.ProcessEnv) =>
    started(
      [
        '--input-type=module',
        '-e',
        `import { databaseForServer } from './server/bin/environment.mjs';
         import { main } from './server/bin/setUp.mjs';
         await main(async () => console.log((await databaseForServer()).appUrl));`,
      ],
      { DATA_DIR: path.join(folder, 'own'), ...env },
    ).ended;

  beforeAll(async () => {
    await onServer(`CREATE DATABASE ${name}`);
    await onServer(`CREATE ROLE ${plain} LOGIN PASSWORD '${password}'`);
  });
  afterAll(async () => {
    await onServer(`DROP DATABASE ${name} WITH (FORCE)`);
    await onServer(`DROP ROLE IF EXISTS ${plain}, ${name}_app`);
  });

  test('gets the application role made beside its owner, once', async () => {
    const first = await use({ DATABASE_URL: own(() => undefined) });
    expect(await ask(first.out.trim(), 'SELECT current_user AS me')).toEqual([{ me: `${name}_app` }]);
    const second = await use({ DATABASE_URL: own(() => undefined) });
    expect(second.out).toBe(first.out);
  });

  test('is told the SQL where its role may not make roles', async () => {
    const told = await use({
      DATA_DIR: path.join(folder, 'own-plain'),
      DATABASE_URL: own((url) => {
        url.username = plain;
        url.password = password;
      }),
    });
    expect(told.code).toBe(1);
    expect(told.out).toContain(`CREATE ROLE "${name}_app" LOGIN NOSUPERUSER`);
    expect(told.out).toContain('then set DATABASE_APP_URL');
    expect(told.out).not.toContain(password);
  });

  test('is told what is wrong with the address', async () => {
    const closed = await freePorts(1);
    for (const [url, sentence] of [
      [own((url) => (url.port = String(closed))), /nothing listens there/],
      [own((url) => (url.password = 'not-the-password')), /wrong password/],
      [own((url) => (url.pathname = '/qw_no_such')), /there is no such database/],
      ['mysql://somewhere', /must look like postgres:/],
    ] as const) {
      const told = await use({ DATABASE_URL: url });
      expect(told.code).toBe(1);
      expect(told.out).toMatch(sentence);
      expect(told.out.trim().split('\n')).toHaveLength(1);
    }
  });
});

// Each starts everything, and may have to build the client first.
describe('npm start', { timeout: 120_000 }, () => {
  const dir = path.join(folder, 'start');
  let env: NodeJS.ProcessEnv;
  let port: number;

  beforeAll(async () => {
    // A quick cluster, which the command then finds in its data folder and starts.
    const database = await quickDatabase(dir, await freePorts(1));
    await database.stop();
    port = await freePorts(3);
    env = { DATA_DIR: dir, PORT: String(port), DEMO: '0' };
  });

  test('serves with a mailbox, and ends all it started on a signal', async () => {
    const { child, ended } = started(['server/bin/start.mjs'], env);
    await said(child, /Ctrl-C stops everything/);
    expect((await fetch(`http://127.0.0.1:${port}/api/health`)).status).toBe(200);

    const transport = createTransport(`smtp://127.0.0.1:${port + 2}`);
    await transport.sendMail({
      from: 'Quayword <no-reply@quayword.example>',
      to: 'purser@tamarisk.example',
      subject: 'Welcome <b>aboard</b>',
      text: 'See https://quayword.example/join?a=1&b=2 please',
      html: '<p>See <script>parent.document.title = 1</script></p>',
    });
    const list = await (await fetch(`http://127.0.0.1:${port + 1}/`)).text();
    expect(list).toContain('Welcome &#60;b&#62;aboard&#60;/b&#62;');
    const mail = await (await fetch(`http://127.0.0.1:${port + 1}/1`)).text();
    expect(mail).toContain('href="https://quayword.example/join?a=1&#38;b=2"');
    expect(mail).toContain('sandbox="allow-popups allow-popups-to-escape-sandbox"');
    expect(mail).not.toContain('<script>');
    expect(readdirSync(path.join(dir, 'mail'))).toHaveLength(1);

    child.kill('SIGTERM');
    expect((await ended).code).toBe(0);
    await expect(fetch(`http://127.0.0.1:${port}/api/health`)).rejects.toThrow();
    await expect(fetch(`http://127.0.0.1:${port + 1}/`)).rejects.toThrow();
    expect(readdirSync(path.join(dir, 'pg'))).not.toContain('postmaster.pid');
  });

  test('says so when the keys of a database are gone, and makes no new ones (R24)', async () => {
    const secrets = path.join(dir, 'secrets.json');
    renameSync(secrets, `${secrets}.away`);
    const lost = await started(['server/bin/start.mjs'], env).ended;
    expect(lost.code).toBe(1);
    expect(lost.out).toContain('Restore that file, or remove the folder');
    expect(existsSync(secrets)).toBe(false);
    renameSync(`${secrets}.away`, secrets);
  });

  test('ends everything and fails when the server ends by itself (R24)', async () => {
    const { code, out } = await started(['server/bin/start.mjs'], { ...env, VAULT_KEYS: 'short:abc' }).ended;
    expect(code).toBe(1);
    expect(out).toContain('VAULT_KEYS');
    expect(out).toContain('The server ended by itself (code 1)');
    expect(readdirSync(path.join(dir, 'pg'))).not.toContain('postmaster.pid');
  });
});
