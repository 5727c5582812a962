import type { z } from 'zod';
import type { DealerAction, VesselAction } from '../rules/permissions.ts';

/**
 * Who may call a route.
 * - `anonymous`: nobody needs to be signed in.
 * - `person`: any signed-in person, about themselves.
 * - `vessel`: a person whose roles on `:vesselId` allow one of `actions`; where there are several
 *   (one per audience) the verb checks the exact one. Somebody else's vessel is not found.
 * - `dealer`: a member of a dealer whose role allows the action.
 */
export type Access =
  | { readonly kind: 'anonymous' }
  | { readonly kind: 'person' }
  | { readonly kind: 'vessel'; readonly actions: readonly VesselAction[] }
  | { readonly kind: 'dealer'; readonly action: DealerAction };

export type Method = 'GET' | 'POST' | 'PUT' | 'PATCH' | 'DELETE';

/** One route as both sides know it. Paths are below `/api`. Safe methods never write. */
export interface Contract<
  P extends z.ZodType = z.ZodType,
  Q extends z.ZodType = z.ZodType,
  B extends z.ZodType = z.ZodType,
  R extends z.ZodType = z.ZodType,
> {
  /** `domain.verb`, unique; also the operation id of the OpenAPI document. */
  readonly name: string;
  readonly method: Method;
  readonly path: string;
  readonly summary: string;
  readonly access: Access;
  /** Asks for a fresh proof of identity (password, and code when enrolled) at most 10 minutes old. */
  readonly fresh?: boolean;
  /** The response may carry a passphrase, so it is never kept for repeats of an idempotency key. */
  readonly secret?: boolean;
  /** Largest request body, in bytes; JSON_MAX_BYTES unless said. */
  readonly bodyMax?: number;
  readonly params?: P;
  readonly query?: Q;
  readonly body?: B;
  /** JSON body's schema, or the kind of file answered. */
  readonly response: R | 'pdf' | 'csv' | 'empty';
  /** Success status; 200 unless said. */
  readonly status?: number;
}

/** Keeps the precise schema types of a contract. */
export function contract<
  P extends z.ZodType = z.ZodType<Record<string, never>>,
  Q extends z.ZodType = z.ZodType<Record<string, never>>,
  B extends z.ZodType = z.ZodType<undefined>,
  R extends z.ZodType = z.ZodType<undefined>,
>(definition: Contract<P, Q, B, R>): Contract<P, Q, B, R> {
  return definition;
}

export const anonymous: Access = { kind: 'anonymous' };
export const person: Access = { kind: 'person' };
export const vessel = (...actions: VesselAction[]): Access => ({ kind: 'vessel', actions });
export const dealer = (action: DealerAction): Access => ({ kind: 'dealer', action });
