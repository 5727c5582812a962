import argon2 from 'argon2';
import type { Config } from '../config.ts';
import { AppError } from '../errors.ts';

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

/** Throws `unavailable` when too many wait already, so that neither memory nor patience runs out. */
async function inTurn<T>(work: () => Promise<T>): Promise<T> {
  if (working < AT_ONCE) {
    working += 1;
  } else {
    if (waiting.length >= WAITING_MAX) {
      throw new AppError(
        'unavailable',
        'Many people are signing in just now. Please try again in a moment.',
        { retryAfter: 2 },
      );
    }
    // Whoever ends hands its place on, so nobody who comes meanwhile can take it too.
    await new Promise<void>((resolve) => waiting.push(resolve));
  }
  try {
    return await work();
  } finally {
    const next = waiting.shift();
    if (next) next();
    else working -= 1;
  }
}

/** Argon2id with the installation's pepper, which is kept outside the database. */
export function hashPassword(config: Config, password: string): Promise<string> {
  return inTurn(() => argon2.hash(password, { ...PARAMETERS, secret: config.passwordPepper }));
}

let nobodys: Promise<string> | null = null;

/** A hash that belongs to nobody, made once; a failure is not kept. */
function nobodysHash(config: Config): Promise<string> {
  nobodys ??= argon2
    .hash('nobody has this password', { ...PARAMETERS, secret: config.passwordPepper })
    .catch((error: unknown) => {
      nobodys = null;
      throw error;
    });
  return nobodys;
}

/**
 * Whether the password is right. Without a stored hash nobody's is checked, so that an unknown address costs
 * the same time as a known one.
 */
export async function passwordMatches(
  config: Config,
  stored: string | null,
  password: string,
): Promise<boolean> {
  // Made in either case, so that the first unknown address after a start does not stand out.
  const nobody = await nobodysHash(config);
  const matches = await inTurn(() =>
    argon2.verify(stored ?? nobody, password, { secret: config.passwordPepper }),
  );
  return stored !== null && matches;
}

/** Whether a stored hash was made with weaker parameters than today's. */
export function needsNewHash(stored: string): boolean {
  return argon2.needsRehash(stored, PARAMETERS);
}
