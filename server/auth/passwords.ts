import argon2 from 'argon2';
import type { Config } from '../config.ts';
import { AppError, invalid } from '../errors.ts';
import { contextWords } from '../passphrases/score.ts';

/**
 * OWASP's minimum for argon2id (Password Storage Cheat Sheet): m = 19456 KiB, t = 2, p = 1. RFC 9106 section 4
 * asks for a 128-bit salt and a 256-bit tag.
 */
const PARAMETERS = {
  type: argon2.argon2id,
  memoryCost: 19_456,
  timeCost: 2,
  parallelism: 1,
  hashLength: 32,
} as const;
/** Hashes at work at one time; each takes about 20 MB. */
const AT_ONCE = 4;
/** Hashes that may wait for their turn before people are asked to come back. */
const WAITING_MAX = 60;

let working = 0;
const waiting: (() => void)[] = [];

async function inTurn<T>(work: () => Promise<T>): Promise<T> {
  if (working >= AT_ONCE) {
    if (waiting.length >= WAITING_MAX) {
      throw new AppError(
        'unavailable',
        'Many people are signing in just now. Please try again in a moment.',
        { retryAfter: 2 },
      );
    }
    await new Promise<void>((resolve) => waiting.push(resolve));
  }
  working += 1;
  try {
    return await work();
  } finally {
    working -= 1;
    waiting.shift()?.();
  }
}

/** Argon2id with the installation's pepper, which is kept outside the database. */
export function hashPassword(config: Config, password: string): Promise<string> {
  return inTurn(() => argon2.hash(password, { ...PARAMETERS, secret: config.passwordPepper }));
}

let nobodys: Promise<string> | null = null;

/**
 * Whether the password is right. Without a stored hash a made-up one is checked, so that an unknown address costs
 * the same time as a known one.
 */
export async function passwordMatches(
  config: Config,
  stored: string | null,
  password: string,
): Promise<boolean> {
  nobodys ??= hashPassword(config, 'nobody has this password');
  const hash = stored ?? (await nobodys);
  const matches = await inTurn(() => argon2.verify(hash, password, { secret: config.passwordPepper }));
  return stored !== null && matches;
}

/** Whether a stored hash was made with weaker parameters than today's. */
export function needsNewHash(stored: string): boolean {
  return argon2.needsRehash(stored, PARAMETERS);
}

const LIST = 'passwords-common';
const COMMONEST = 3_000;
let common: Promise<ReadonlySet<string>> | null = null;

/** The commonest passwords of the strength package's own list, most common first. */
function commonPasswords(): Promise<ReadonlySet<string>> {
  common ??= (async () => {
    const { dictionary } = await import('@zxcvbn-ts/language-common');
    const { [LIST]: list = [] } = dictionary as Record<string, Iterable<string>>;
    return new Set(Array.from(list).slice(0, COMMONEST));
  })();
  return common;
}

/** Refuses a password that is among the commonest or is one of the person's or vessel's own words. */
export async function refuseEasyPassword(password: string, context: readonly string[]): Promise<void> {
  const plain = password.toLowerCase().replace(/[^\p{L}\p{N}]/gu, '');
  const easy = (await commonPasswords()).has(password.toLowerCase());
  if (easy)
    throw invalid({
      password: [
        'This is one of the first passwords anybody tries. Choose another; a few unrelated words are good.',
      ],
    });
  const own = contextWords(context).map((word) => word.toLowerCase().replace(/[^\p{L}\p{N}]/gu, ''));
  if (own.some((word) => word.length >= 4 && (plain === word || plain.replace(/\d+$/, '') === word))) {
    throw invalid({
      password: ['This is a name that belongs to you or the vessel. Choose something unrelated.'],
    });
  }
}
