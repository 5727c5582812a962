import { invalid } from '../errors.ts';
import { contextWords } from '../passphrases/score.ts';
import type { Services } from '../services.ts';

const LIST = 'passwords-common';
/** ASVS 6.2.4 asks for the 3000 commonest that satisfy the length rule. */
const COMMONEST = 3_000;
let common: Promise<ReadonlySet<string>> | null = null;

/** The commonest passwords of the strength package's own list, most common first. Loaded once, when first asked. */
function commonPasswords(): Promise<ReadonlySet<string>> {
  common ??= import('@zxcvbn-ts/language-common').then(({ dictionary }) => {
    const { [LIST]: list = [] } = dictionary as Record<string, Iterable<string>>;
    const first = new Set(Array.from(list).slice(0, COMMONEST));
    if (first.size < COMMONEST) throw new Error('The list of common passwords is not there');
    return first;
  });
  return common;
}

const plain = (text: string) => text.toLowerCase().replace(/[^\p{L}\p{N}]/gu, '');

/**
 * Refuses a password that is among the commonest, or is one of the person's or vessels' own names, also with a
 * figure behind it. Throws `invalid` naming the field `password`.
 */
export async function refuseEasyPassword(password: string, context: readonly string[]): Promise<void> {
  if ((await commonPasswords()).has(password.toLowerCase())) {
    throw invalid({
      password: [
        'This is one of the first passwords anybody tries. Choose another; a few unrelated words are good.',
      ],
    });
  }
  const given = plain(password);
  const own = contextWords(context).map(plain);
  if (own.some((word) => word.length >= 4 && (given === word || given.replace(/\d+$/, '') === word))) {
    throw invalid({
      password: ['This is a name that belongs to you or the vessel. Choose something unrelated.'],
    });
  }
}

/** The names somebody who knows the person would try: theirs, their address, their vessels. */
export async function namesAround(services: Services, personId: string): Promise<string[]> {
  const row = await services.db.transaction({ kind: 'system' }, (tx) =>
    services.db.row<{ names: string[] }>(
      tx,
      `SELECT ARRAY[p.name, p.email::text, split_part(p.email::text, '@', 1)] || coalesce(
         (SELECT array_agg(v.name) FROM memberships m JOIN vessels v ON v.id = m.vessel_id
          WHERE m.person_id = p.id AND m.ended_at IS NULL), '{}') AS names
       FROM people p WHERE p.id = $id`,
      { id: personId },
    ),
  );
  return row?.names ?? [];
}
