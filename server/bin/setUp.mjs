import { spawn, spawnSync } from 'node:child_process';
import { existsSync, readdirSync, statSync } from 'node:fs';
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

/**
 * Installs the packages of package-lock.json when they are missing or older than it, or when a production install
 * left out `needs`, a package only development has.
 */
export async function packagesUp({ needs = 'tsx', log = say, children = [] } = {}) {
  const modules = path.join(ROOT, 'node_modules');
  const mark = path.join(modules, '.package-lock.json');
  const lock = path.join(ROOT, 'package-lock.json');
  if (
    existsSync(mark) &&
    statSync(mark).mtimeMs >= statSync(lock).mtimeMs &&
    existsSync(path.join(modules, needs))
  )
    return;
  log('Installing packages (a minute or two the first time)…');
  const env = { ...process.env, ...(needs === 'tsx' ? {} : { NODE_ENV: 'development' }) };
  const npm = (...args) =>
    new Promise((resolve) => {
      const stdio = ['ignore', 'ignore', 'pipe'];
      // Said outright: `npm start --silent` would silence this one too, and its reasons with it.
      const flags = ['--no-audit', '--no-fund', '--loglevel=error'];
      const child = spawn('npm', [...args, ...flags], {
        cwd: ROOT,
        env,
        stdio,
        detached: true,
      });
      children.push(child);
      let told = '';
      child.stderr.on('data', (part) => (told += part));
      child.once('error', (error) => resolve(`npm error ${error.message}`));
      child.once('close', (code) => resolve(code === 0 ? null : told));
    });
  // Without a network npm would try each package for minutes; offline it takes what it kept, or fails at once.
  const answer = await npm('ping', '--fetch-retries=0', '--fetch-timeout=15000');
  const offline = /ENOTFOUND|EAI_AGAIN|ETIMEDOUT|ENETUNREACH|EHOSTUNREACH|ECONNREFUSED/.test(answer ?? '');
  const failure = await npm('ci', ...(offline ? ['--offline'] : []));
  if (failure === null) return;
  const why = failure.split('\n').filter((line) => /npm err/i.test(line));
  throw new SetUpError(
    `The packages could not be installed${offline ? ', for the npm registry cannot be reached' : ''}.\n${why.slice(0, 4).join('\n')}\nCheck that npm is there (npm -v), that its registry can be reached and that there is room on the disk, then run the command again.`,
  );
}

/** Whether a program is installed. Servers' own folders count: an ordinary user's PATH often lacks them. */
export const onPath = (program) =>
  [...(process.env.PATH ?? '').split(path.delimiter), '/usr/sbin', '/sbin', '/usr/local/sbin'].some(
    (dir) => dir !== '' && existsSync(path.join(dir, program)),
  );

/**
 * Installs Debian packages. Throws {@link SetUpError} naming them where this user may not; `reason` begins that
 * sentence ("The tests"), `instead` ends it.
 */
export function debianUp(names, reason, { instead = '', log = say } = {}) {
  if (names.length === 0) return;
  const command = `apt-get install -y --no-install-recommends ${names.join(' ')}`;
  if (process.getuid?.() !== 0 || !onPath('apt-get')) {
    throw new SetUpError(
      `${reason} needs ${names.join(', ')}, which this user may not install here. Run as root:\n  ${command}\n${instead}`.trim(),
    );
  }
  log(`Installing ${names.join(', ')} (a minute or two)…`);
  const quiet = {
    stdio: ['ignore', 'pipe', 'pipe'],
    encoding: 'utf8',
    env: { ...process.env, DEBIAN_FRONTEND: 'noninteractive' },
  };
  spawnSync('apt-get', ['update', '-q'], quiet);
  const done = spawnSync('sh', ['-c', command], quiet);
  if (done.status !== 0) {
    const why = (done.stderr ?? '').trim().split('\n').at(-1);
    throw new SetUpError(
      `${names.join(', ')} could not be installed: ${why}\nCheck that Debian's packages can be reached, or install by hand:\n  ${command}\n${instead}`.trim(),
    );
  }
}

/** A program that ended by itself with another code than 0; its own output said why. */
export class ProgramFailed extends SetUpError {
  constructor(sentence, code) {
    super(sentence);
    this.exitCode = code;
  }
}

/**
 * Starts a Node program in a process group of its own, so that Ctrl-C reaches this program alone and everything is
 * ended in order. It is noted in `children` until it has ended.
 */
export function startChild(args, env, { stdio = ['ignore', 'inherit', 'inherit'], children = [] } = {}) {
  const child = spawn(process.execPath, args, { cwd: ROOT, env, stdio, detached: true });
  children.push(child);
  return child;
}

/** Runs a program to its end with its output shown; throws {@link ProgramFailed} with `failed` when it fails. */
export function runToEnd(args, env, failed, options) {
  return new Promise((resolve, reject) => {
    const child = startChild(args, env, options);
    child.once('error', reject);
    child.once('exit', (code) => (code === 0 ? resolve() : reject(new ProgramFailed(failed, code ?? 1))));
  });
}

/**
 * Ends what was begun, once, in order, on Ctrl-C, SIGTERM, a closed terminal, or when `stop` is called: first the
 * `children`, the latest first, then what was given to `last`.
 */
export function orderlyEnd({ children }) {
  const finals = [];
  let stopping = null;
  const stop = (code) => {
    stopping ??= (async () => {
      for (const child of [...children].reverse()) await endChild(child);
      for (const final of finals.reverse()) await final();
      process.exit(code());
    })();
    return stopping;
  };
  return {
    stop: (code) => stop(() => code),
    isStopping: () => stopping !== null,
    last: (final) => finals.push(final),
    /** `codeOf` gives a signal's exit code: 0 for what is meant to be ended so, else 128 + its number. */
    onSignals: (codeOf) => {
      for (const [signal, number] of [
        ['SIGINT', 2],
        ['SIGTERM', 15],
        ['SIGHUP', 1],
      ])
        process.on(signal, () => void stop(() => codeOf(number)));
    },
  };
}

/** The newest change below some files and folders, in milliseconds since 1970. */
function newest(names) {
  return names.reduce((top, name) => {
    const full = path.join(ROOT, name);
    if (!existsSync(full)) return top;
    const stat = statSync(full);
    if (!stat.isDirectory()) return Math.max(top, stat.mtimeMs);
    const below = readdirSync(full).map((inside) => path.join(name, inside));
    return Math.max(top, stat.mtimeMs, newest(below));
  }, 0);
}

/** Builds the client when its sources are newer than the built one. */
export async function clientUp(options = {}) {
  const built = path.join(ROOT, 'dist', 'client', 'index.html');
  const sources = [
    ...['src', 'shared', 'index.html'],
    ...['vite.config.ts', 'tailwind.config.ts', 'tsconfig.json', 'package-lock.json'],
  ];
  if (existsSync(built) && statSync(built).mtimeMs >= newest(sources)) return;
  say('Building the client…');
  await runToEnd(
    ['node_modules/vite/bin/vite.js', 'build', '--logLevel', 'warn'],
    process.env,
    'The client could not be built. The lines above say why.',
    options,
  );
}

/** Whether something already listens on a port. Throws {@link SetUpError} where this user may not open it at all. */
export function portTaken(port, host) {
  return new Promise((resolve, reject) => {
    const probe = createServer();
    probe.once('error', (error) => {
      if (error.code === 'EACCES')
        reject(new SetUpError(`Only root may open port ${port}. Choose one from 1024 on, as in PORT=4180.`));
      else resolve(error.code === 'EADDRINUSE');
    });
    probe.listen(port, host, () => probe.close(() => resolve(false)));
  });
}

/** A port from the environment, or `otherwise`. Throws {@link SetUpError} where it is no port. */
export function portFrom(name, otherwise) {
  const text = process.env[name];
  if (text === undefined || text === '') return otherwise;
  const port = Number(text);
  if (!Number.isInteger(port) || port < 1 || port > 65_535)
    throw new SetUpError(`${name} is "${text}"; it must be a whole number from 1 to 65535.`);
  return port;
}

/** Asks a child and whatever it started to end, and waits until it has; insists after 15 seconds. */
function endChild(child) {
  if (child.pid === undefined || child.exitCode !== null || child.signalCode !== null)
    return Promise.resolve();
  const tell = (signal) => {
    try {
      process.kill(-child.pid, signal);
    } catch (error) {
      if (error.code !== 'ESRCH') throw error;
    }
  };
  return new Promise((resolve) => {
    const insist = setTimeout(() => tell('SIGKILL'), 15_000);
    child.once('exit', () => {
      clearTimeout(insist);
      resolve();
    });
    tell('SIGTERM');
  });
}

/** What to tell the person about an error: our own sentence, or the system's with what to do. */
export function sentenceOf(error) {
  if (error instanceof SetUpError) return error.message;
  if (error?.code === 'EACCES' || error?.code === 'EPERM' || error?.code === 'EROFS')
    return `${error.path ?? 'A file'} may not be read or written by this user (another one may have run this before). Correct its owner, or set DATA_DIR to a folder of your own.`;
  if (error?.code === 'ENOSPC') return 'The disk is full. Free some room, then run the command again.';
  return String(error?.stack ?? error);
}

/** Runs a command's whole work and turns a failure into one clear sentence and exit code 1. */
export async function main(work) {
  try {
    await work();
  } catch (error) {
    process.stderr.write(`${sentenceOf(error)}\n`);
    process.exit(1);
  }
}
