import argon2 from 'argon2';
import type { Config } from '../config.ts';

/** Argon2id, 19 MiB, two passes, keyed by the pepper (OWASP Password Storage). */
export function hashPassword(config: Config, password: string): Promise<string> {
  return argon2.hash(password, {
    type: argon2.argon2id,
    memoryCost: 19_456,
    timeCost: 2,
    parallelism: 1,
    secret: config.passwordPepper,
  });
}
