import type { Request } from 'express';
import type { z } from 'zod';
import { AppError, invalid, notFound } from '../errors.ts';
import type { AnyContract } from './reply.ts';

/** A path that cannot name anything of ours names nothing. */
export function parseParams(contract: AnyContract, request: Request): unknown {
  if (!contract.params) return undefined;
  const parsed = contract.params.safeParse(request.params);
  if (!parsed.success) throw notFound();
  return parsed.data;
}

export function parseQuery(contract: AnyContract, request: Request): unknown {
  if (!contract.query) return undefined;
  return check(contract.query, request.query);
}

export function parseBody(contract: AnyContract, request: Request): unknown {
  if (!contract.body) return undefined;
  return check(contract.body, request.body);
}

/** Every invalid field with what would be right, keyed by its path. */
function check(schema: z.ZodType, value: unknown): unknown {
  const unkept = pathOfUnkept(value);
  if (unkept !== null)
    throw invalid({ [unkept]: ['Leave out the zero character and broken letters; they cannot be kept'] });
  const parsed = schema.safeParse(value);
  if (parsed.success) return parsed.data;
  // A map, because a field may be called as something that every object has.
  const errors = new Map<string, string[]>();
  for (const issue of parsed.error.issues) {
    const keys =
      issue.code === 'unrecognized_keys' ? issue.keys.map((name) => [...issue.path, name]) : [issue.path];
    for (const path of keys) {
      const key = path.map(String).join('.') || 'body';
      const sentence =
        issue.code === 'unrecognized_keys' ? 'This field is not known here; leave it out' : issue.message;
      errors.set(key, [...(errors.get(key) ?? []), sentence]);
    }
  }
  throw new AppError('invalid', 'Some of this needs correcting. Each field says what would be right.', {
    errors: Object.fromEntries(errors),
  });
}

/**
 * Where a text or a field's name holds what the database can keep in no column: U+0000, or half of a surrogate pair
 * (PostgreSQL manual 8.3 and 8.14.1). Null when there is nothing of the kind.
 */
function pathOfUnkept(value: unknown, path: readonly string[] = []): string | null {
  if (typeof value === 'string') return kept(value) ? null : path.join('.') || 'body';
  if (typeof value !== 'object' || value === null) return null;
  if (path.length > DEEPEST) return path.slice(0, 4).join('.');
  for (const [name, inner] of Object.entries(value)) {
    if (!kept(name)) return path.join('.') || 'body';
    const found = pathOfUnkept(inner, [...path, name]);
    if (found !== null) return found;
  }
  return null;
}

/** No form of ours nests deeper than a few levels. */
const DEEPEST = 16;
const kept = (text: string): boolean => !text.includes('\0') && !/\p{Surrogate}/u.test(text);
