import { execFileSync, spawn, spawnSync } from 'node:child_process';
import { randomBytes } from 'node:crypto';
import { chmodSync, existsSync, mkdirSync, readFileSync, statSync, writeFileSync } from 'node:fs';
import { createServer } from 'node:net';
import path from 'node:path';
import { fileURLToPath } from 'node:url';

/** The project's folder. */
export const ROOT = fileURLToPath(new URL('../..', import.meta.url));
/** Where the local database, the development secrets and the mails lie. */
export const DATA = process.env.DATA_DIR ? path.resolve(process.env.DATA_DIR) : path.join(ROOT, '.data');

const LEAST_NODE = [20, 19, 0];

/** A failure with a sentence that says what to do; printed without a stack. */
export class SetUpError extends Error {}

export const say = (sentence) => process.stdout.write(`${sentence}\n`);

/** Throws {@link SetUpError} when this Node.js is too old. */
export function checkNode(version = process.versions.node) {
  const parts = version.split('.').map(Number);
  const older = LEAST_NODE.findIndex((least, index) => parts[index] !== least);
  if (older !== -1 && parts[older] < LEAST_NODE[older]) {
    throw new SetUpError(
      `This is Node.js ${version}; Quayword needs ${LEAST_NODE.join('.')} or newer. Install it, then run the command again.`,
    );
  }
}

/** Installs the packages of package-lock.json when they are missing or older than it. */
export function packagesUp() {
  const mark = path.join(ROOT, 'node_modules', '.package-lock.json');
  const lock = path.join(ROOT, 'package-lock.json');
  if (existsSync(mark) && statSync(mark).mtimeMs >= statSync(lock).mtimeMs) return;
  say('Installing packages (a minute or two the first time)…');
  const done = spawnSync('npm', ['ci', '--no-audit', '--no-fund'], {
    cwd: ROOT,
    stdio: ['ignore', 'pipe', 'pipe'],
    encoding: 'utf8',
  });
  if (done.error || done.status !== 0) {
    const why = (done.stderr ?? '')
      .split('\n')
      .filter((line) => /npm error/i.test(line))
      .slice(0, 4)
      .join('\n');
    throw new SetUpError(
      `The packages could not be installed.\n${why}\nCheck that the npm registry can be reached and that there is room on the disk, then run the command again.`,
    );
  }
}

const onPath = (program) =>
  spawnSync('sh', ['-c', `command -v ${program}`], { stdio: 'ignore' }).status === 0;

/**
 * Installs Debian packages whose programs are missing. Throws {@link SetUpError} naming them where this user may not.
 * `wanted` maps a program to its package.
 */
export function debianUp(wanted, reason) {
  const missing = Object.entries(wanted).filter(([program]) => !onPath(program));
  if (missing.length === 0) return;
  const names = [...new Set(missing.map(([, name]) => name))];
  const command = `apt-get install -y --no-install-recommends ${names.join(' ')}`;
  if (process.getuid?.() !== 0 || !onPath('apt-get')) {
    throw new SetUpError(
      `${reason} needs ${names.join(', ')}, which this user may not install. Run as root:  ${command}`,
    );
  }
  say(`Installing ${names.join(', ')}…`);
  const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' };
  const quiet = { stdio: ['ignore', 'pipe', 'pipe'], encoding: 'utf8', env };
  spawnSync('apt-get', ['update', '-q'], quiet);
  const done = spawnSync('sh', ['-c', command], quiet);
  if (done.status !== 0) {
    throw new SetUpError(
      `${names.join(', ')} could not be installed: ${(done.stderr ?? '').trim().split('\n').at(-1)}\nCheck that Debian's packages can be reached, or install them by hand:  ${command}`,
    );
  }
}

/** Secrets of this folder, made once; for development and the demo only. */
export function developmentSecrets() {
  mkdirSync(DATA, { recursive: true, mode: 0o755 });
  const file = path.join(DATA, 'keys.json');
  if (!existsSync(file)) {
    const key = () => randomBytes(32).toString('base64');
    const made = {
      SESSION_KEYS: `dev1:${key()}`,
      VAULT_KEYS: `dev1:${key()}`,
      FINGERPRINT_KEY: key(),
      PASSWORD_PEPPER: key(),
      LOG_SIGNING_SEED: key(),
    };
    writeFileSync(file, JSON.stringify(made, null, 2), { mode: 0o600 });
  }
  chmodSync(file, 0o600);
  return JSON.parse(readFileSync(file, 'utf8'));
}

/** The server's environment: what the person set, then this folder's own values. */
export function serverEnvironment({ ownerUrl, appUrl }, extra = {}) {
  const production = process.env.NODE_ENV === 'production';
  return {
    PORT: '4180',
    HOST: '127.0.0.1',
    ...(production
      ? {}
      : {
          ...developmentSecrets(),
          DEMO_SECRETS: '1',
          DEMO: '1',
          CHECKPOINT_DIR: path.join(DATA, 'log-heads'),
        }),
    ...extra,
    ...process.env,
    DATA_DIR: DATA,
    DATABASE_URL: ownerUrl,
    DATABASE_APP_URL: appUrl,
  };
}

/** Runs a program to its end with its output shown; throws {@link SetUpError} with `failed` when it fails. */
export function runToEnd(args, env, failed) {
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, args, { cwd: ROOT, env, stdio: 'inherit' });
    child.once('error', reject);
    child.once('exit', (code) => (code === 0 ? resolve() : reject(new SetUpError(failed))));
  });
}

const newest = (files) => {
  const out = execFileSync('find', [...files, '-type', 'f', '-printf', '%T@\n'], {
    cwd: ROOT,
    encoding: 'utf8',
  });
  return out.split('\n').reduce((top, line) => Math.max(top, Number(line) || 0), 0);
};

/** Builds the client when its sources are newer than the built one. */
export async function clientUp() {
  const built = path.join(ROOT, 'dist', 'client', 'index.html');
  const sources = ['src', 'shared', 'print', 'index.html', 'vite.config.ts', 'package-lock.json'];
  if (existsSync(built) && statSync(built).mtimeMs / 1000 >= newest(sources)) return;
  say('Building the client…');
  await runToEnd(
    ['node_modules/vite/bin/vite.js', 'build', '--logLevel', 'warn'],
    process.env,
    'The client could not be built. The lines above say why.',
  );
}

/** Whether something already listens on a port of this machine. */
export function portTaken(port, host) {
  return new Promise((resolve) => {
    const probe = createServer();
    probe.once('error', () => resolve(true));
    probe.listen(port, host, () => probe.close(() => resolve(false)));
  });
}

/** Runs a command's whole work and turns a failure into one clear sentence and exit code 1. */
export async function main(work) {
  try {
    await work();
  } catch (error) {
    process.stderr.write(error instanceof SetUpError ? `${error.message}\n` : `${error?.stack ?? error}\n`);
    process.exit(1);
  }
}
