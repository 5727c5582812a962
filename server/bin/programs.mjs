import { execFileSync, spawnSync } from 'node:child_process';
import { existsSync, mkdirSync, readdirSync, writeFileSync } from 'node:fs';
import path from 'node:path';
import { debianUp, onPath, SetUpError } from './setUp.mjs';

const LEAST_VERSION = 15;
const DEBIAN = '/usr/lib/postgresql';

/** The folder of the newest usable PostgreSQL server's programs (or of the `wanted` version's), or null. */
function serverPrograms(wanted) {
  const versions = existsSync(DEBIAN)
    ? readdirSync(DEBIAN)
        .map(Number)
        .filter((version) => version >= LEAST_VERSION)
        .sort((a, b) => b - a)
        .map((version) => path.join(DEBIAN, String(version), 'bin'))
    : [];
  const onThePath = (process.env.PATH ?? '').split(path.delimiter).filter((dir) => dir !== '');
  return (
    [...versions, ...onThePath].find(
      (dir) =>
        ['initdb', 'postgres', 'pg_ctl', 'psql'].every((program) => existsSync(path.join(dir, program))) &&
        (wanted === undefined ? versionOf(dir) >= LEAST_VERSION : versionOf(dir) === wanted),
    ) ?? null
  );
}

function versionOf(dir) {
  const told = spawnSync(path.join(dir, 'postgres'), ['--version'], { encoding: 'utf8', cwd: '/' });
  return Number(/(\d+)/.exec(told.stdout ?? '')?.[1] ?? 0);
}

/** Installs the server where that is allowed. Debian's own cluster is not made: ours has its own folder and port. */
function serverUp(log) {
  const found = serverPrograms();
  if (found) return found;
  if (process.getuid?.() === 0 && onPath('apt-get')) {
    const conf = '/etc/postgresql-common/createcluster.conf';
    mkdirSync(path.dirname(conf), { recursive: true });
    if (!existsSync(conf)) writeFileSync(conf, 'create_main_cluster = false\n');
  }
  debianUp(['postgresql'], 'Quayword keeps its data in PostgreSQL and', {
    instead: 'Or set DATABASE_URL to a PostgreSQL server you have.',
    log,
  });
  const installed = serverPrograms();
  if (installed) return installed;
  throw new SetUpError(
    `PostgreSQL ${LEAST_VERSION} or newer is needed and this system offers an older one. Set DATABASE_URL to a newer server.`,
  );
}

/** The person's own PG… settings and locale must not reach a server that is ours alone. */
function ownEnvironment(extra) {
  const kept = Object.entries(process.env).filter(([name]) => !/^(PG|LC_|LANG)/.test(name));
  return { ...Object.fromEntries(kept), LC_ALL: 'C.UTF-8', ...extra };
}

/**
 * PostgreSQL's programs, installed if need be, and as whom they run: the server refuses to run as root, so root
 * runs it as Debian's `postgres` user. Throws {@link SetUpError} saying what to do.
 */
export function postgresPrograms(log) {
  let bin = serverUp(log);
  const asRoot = process.getuid?.() === 0;
  const id = (flag) => {
    try {
      return Number(execFileSync('id', [flag, 'postgres'], { encoding: 'utf8', stdio: 'pipe' }));
    } catch {
      throw new SetUpError(
        'PostgreSQL refuses to run as root and there is no user called postgres. Make one (useradd --system postgres), or run this command as an ordinary user.',
      );
    }
  };
  const user = asRoot ? { uid: id('-u'), gid: id('-g') } : null;
  const asUser = (file, args) =>
    user
      ? ['setpriv', [`--reuid=${user.uid}`, `--regid=${user.gid}`, '--clear-groups', file, ...args]]
      : [file, args];
  return {
    user,
    /** A folder made by one version can be opened by that version only. */
    choose: (version, data) => {
      const found = serverPrograms(version);
      if (!found)
        throw new SetUpError(
          `${data} was made by PostgreSQL ${version}, which is not installed any more. Install postgresql-${version}, or move that folder away to begin with an empty database.`,
        );
      bin = found;
    },
    /** Runs one program to its end as the database's user: `{ok, out, err}`. */
    run: (program, args, { input, env = {}, output = true } = {}) => {
      const [file, all] = asUser(path.join(bin, program), args);
      const done = spawnSync(file, all, {
        cwd: '/',
        input,
        env: ownEnvironment(env),
        encoding: 'utf8',
        // A server started here inherits the outputs, and a pipe would never end; nor must Ctrl-C reach it.
        stdio: output ? 'pipe' : 'ignore',
        detached: !output,
      });
      return { ok: done.status === 0, out: (done.stdout ?? '').trim(), err: (done.stderr ?? '').trim() };
    },
    /** Whether the database's user may walk into a folder. */
    reaches: (folder) => {
      const [file, all] = asUser('test', ['-x', folder]);
      return spawnSync(file, all, { cwd: '/' }).status === 0;
    },
  };
}
