import { randomBytes } from 'node:crypto';
import { chmodSync, existsSync, mkdirSync, readFileSync, renameSync, writeFileSync } from 'node:fs';
import path from 'node:path';
import { SetUpError } from './setUp.mjs';

/** 32 random octets in base64, as every development secret is. */
export const randomKey = () => randomBytes(32).toString('base64');

/** A password that needs no escaping in SQL or in a URL; 192 random bits. */
export const randomPassword = () => randomBytes(24).toString('hex');

/**
 * The secrets kept in one data folder, readable by their owner alone. What `makers` names and the folder lacks is
 * made and kept; nothing once kept is made again. `added` lists what is new. Throws {@link SetUpError} when the
 * file is damaged.
 */
export function keptSecrets(dir, makers) {
  mkdirSync(dir, { recursive: true });
  const file = path.join(dir, 'secrets.json');
  let kept = {};
  if (existsSync(file)) {
    chmodSync(file, 0o600);
    try {
      kept = JSON.parse(readFileSync(file, 'utf8'));
    } catch {
      throw new SetUpError(
        `${file} is damaged. Restore it from a backup: what is encrypted in the database cannot be read without it. If nothing there is needed, remove the folder ${dir} and run the command again.`,
      );
    }
  }
  const added = Object.keys(makers).filter((name) => kept[name] === undefined);
  if (added.length > 0) {
    kept = { ...kept, ...Object.fromEntries(added.map((name) => [name, makers[name]()])) };
    const fresh = `${file}.${process.pid}.new`;
    writeFileSync(fresh, `${JSON.stringify(kept, null, 2)}\n`, { mode: 0o600 });
    renameSync(fresh, file);
  }
  return { secrets: kept, added };
}
