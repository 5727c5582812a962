import type { Request, Response } from 'express';
import type { z } from 'zod';
import {
  AUDIENCES,
  type Audience,
  dealerMay,
  may,
  type VesselAction,
} from '../../shared/rules/permissions.ts';
import type { Tx } from '../db/connection.ts';
import { AppError, forbidden, notFound } from '../errors.ts';
import type { Services } from '../services.ts';
import { idempotent } from './idempotency.ts';
import { requireSameOrigin } from './origin.ts';
import type { AnyContract, FileReply, Presented } from './reply.ts';
import { told } from './requestLog.ts';
import { type Actor, FRESH_MS, readSessionCookie, resolveActor, seenLongAgo, writeSeen } from './session.ts';
import { parseBody, parseParams, parseQuery } from './validate.ts';

type Output<T> = T extends z.ZodType ? z.output<T> : undefined;

type ParamsOf<C> = C extends { params?: infer P } ? Output<NonNullable<P>> : undefined;
type QueryOf<C> = C extends { query?: infer Q } ? Output<NonNullable<Q>> : undefined;
type BodyOf<C> = C extends { body?: infer B } ? Output<NonNullable<B>> : undefined;
type ReplyOf<C> = C extends { response: infer R }
  ? R extends z.ZodType
    ? z.input<R>
    : FileReply | undefined
  : never;
export type ResponseOf<C> = C extends { response: infer R }
  ? Exclude<R, string> extends z.ZodType
    ? z.input<Exclude<R, string>> | FileReply
    : FileReply | undefined
  : ReplyOf<C>;

interface Base<C> {
  readonly services: Services;
  readonly now: Date;
  readonly params: ParamsOf<C>;
  readonly query: QueryOf<C>;
  readonly body: BodyOf<C>;
  readonly request: Request;
  readonly response: Response;
}

/** What a signed-in route's verb is given: one open transaction whose scope is what the actor may see. */
export interface Context<C, Prepared = undefined> extends Base<C> {
  readonly tx: Tx;
  readonly actor: Actor;
  readonly prepared: Prepared;
}

export interface OpenContext<C, Prepared = undefined> extends Base<C> {
  readonly tx: Tx;
  readonly prepared: Prepared;
}

export interface Endpoint {
  readonly contract: AnyContract;
  readonly serve: (services: Services, request: Request, response: Response) => Promise<void>;
}

interface Handlers<C, P> {
  /** Slow work done before the transaction opens and after permission is known, e.g. scoring a passphrase. */
  readonly prepare?: (context: Base<C> & { actor: Actor }) => Promise<P>;
  readonly handle: (context: Context<C, P>) => Promise<ResponseOf<C>>;
}

/** A route for signed-in people: origin, session, permission, freshness, validation, once-only, presentation. */
export function endpoint<C extends AnyContract, P = undefined>(
  contract: C,
  handlers: Handlers<C, P>,
): Endpoint {
  const fleet = contract.access.kind === 'dealer';
  return {
    contract,
    serve: async (services, request, response) => {
      const { db, config, clock } = services;
      const known = told(response);
      known.route = contract.name;
      const sessionId = readSessionCookie(config, request);
      if (!sessionId) throw signInFirst();
      requireSameOrigin(config, request, sessionId);
      const vesselId = vesselOf(contract, request);
      known.vesselId = vesselId;
      const place = { vesselId, fleet };

      const admit = async (tx: Tx) => {
        const actor = await resolveActor(services, tx, sessionId, place);
        if (!actor) throw signInFirst();
        known.personId = actor.personId;
        admitActor(services, contract, actor);
        await admitAudience(services, tx, contract, actor, request);
        return actor;
      };
      const base = (): Base<C> => ({
        services,
        now: clock.now(),
        request,
        response,
        params: parseParams(contract, request) as ParamsOf<C>,
        query: parseQuery(contract, request) as QueryOf<C>,
        body: parseBody(contract, request) as BodyOf<C>,
      });

      let prepared = undefined as P;
      if (handlers.prepare) {
        const actor = await db.transaction({ kind: 'none' }, admit, { readOnly: true });
        prepared = await handlers.prepare({ ...base(), actor });
      }
      const safe = contract.method === 'GET';
      const { reply, seen } = await db.transaction(
        { kind: 'none' },
        async (tx) => {
          const actor = await admit(tx);
          const context: Context<C, P> = { ...base(), tx, actor, prepared };
          const stale = seenLongAgo(actor, context.now);
          const work = async () => present(contract, await handlers.handle(context));
          if (safe) return { reply: await work(), seen: stale ? actor : null };
          if (stale) await writeSeen(services, tx, actor, context.now);
          return { reply: await idempotent(context, contract, work), seen: null };
        },
        { readOnly: safe },
      );
      if (seen) await db.transaction({ kind: 'none' }, (tx) => writeSeen(services, tx, seen, clock.now()));
      send(contract, response, reply);
    },
  };
}

/** A route for nobody in particular: sign-in, reset, invitation, health. No vessel is visible inside. */
export function openEndpoint<C extends AnyContract, P = undefined>(
  contract: C,
  handlers: {
    readonly prepare?: (context: Base<C>) => Promise<P>;
    readonly handle: (context: OpenContext<C, P>) => Promise<ResponseOf<C>>;
  },
): Endpoint {
  return {
    contract,
    serve: async (services, request, response) => {
      told(response).route = contract.name;
      requireSameOrigin(services.config, request, null);
      const base: Base<C> = {
        services,
        now: services.clock.now(),
        request,
        response,
        params: parseParams(contract, request) as ParamsOf<C>,
        query: parseQuery(contract, request) as QueryOf<C>,
        body: parseBody(contract, request) as BodyOf<C>,
      };
      const prepared = (await handlers.prepare?.(base)) as P;
      const reply = await services.db.transaction({ kind: 'none' }, async (tx) =>
        present(contract, await handlers.handle({ ...base, tx, prepared })),
      );
      send(contract, response, reply);
    },
  };
}

const signInFirst = () => new AppError('not_signed_in', 'Your session has ended. Please sign in again.');

const UUID = /^[0-9a-f]{8}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{12}$/i;

function vesselOf(contract: AnyContract, request: Request): string | null {
  if (contract.access.kind !== 'vessel') return null;
  const id = request.params.vesselId;
  if (typeof id !== 'string' || !UUID.test(id)) throw notFound();
  return id.toLowerCase();
}

function admitActor(services: Services, contract: AnyContract, actor: Actor): void {
  const { access } = contract;
  const denied = (error: AppError) => {
    services.log.warn(
      { event: 'denied', route: contract.name, person: actor.personId, code: error.code },
      'denied',
    );
    return error;
  };
  if (access.kind === 'vessel') {
    if (actor.vesselId === null) throw denied(notFound());
    if (!access.actions.some((action) => may(actor.roles, action))) throw denied(forbidden());
  }
  if (access.kind === 'dealer') {
    if (actor.dealerId === null) throw denied(notFound());
    if (!dealerMay(actor.dealerRole, access.action)) throw denied(forbidden());
  }
  if (access.kind !== 'person' && actor.secondFactorMissing) {
    throw new AppError(
      'second_factor_needed',
      'Your role here asks for a second factor. Set one up on your account page, then sign in with it.',
    );
  }
  if (contract.fresh && services.clock.now().getTime() - actor.provedAt.getTime() > FRESH_MS) {
    throw new AppError('step_up', 'Please confirm it is you, then this goes through.');
  }
}

const isFile = (reply: unknown): reply is FileReply =>
  typeof reply === 'object' && reply !== null && 'filename' in reply && 'contentType' in reply;

/**
 * Where a route's actions differ by audience and its path names the network, the action for that network's audience
 * decides, before anything of the request is looked at.
 */
async function admitAudience(
  services: Services,
  tx: Tx,
  contract: AnyContract,
  actor: Actor,
  request: Request,
): Promise<void> {
  const { networkId } = request.params;
  if (contract.access.kind !== 'vessel' || typeof networkId !== 'string') return;
  const actions: readonly VesselAction[] = contract.access.actions;
  if (!actions.some((action) => AUDIENCES.some((audience) => action.endsWith(`.${audience}`)))) return;
  if (!UUID.test(networkId)) throw notFound();
  const network = await services.db.row<{ audience: Audience }>(
    tx,
    'SELECT audience FROM networks WHERE id = $network AND vessel_id = $vessel AND removed_at IS NULL',
    { network: networkId, vessel: actor.vesselId },
  );
  if (!network) throw notFound();
  const exact = actions.filter((action) => action.endsWith(`.${network.audience}`));
  if (!exact.some((action) => may(actor.roles, action))) {
    services.log.warn({ event: 'denied', route: contract.name, person: actor.personId }, 'denied');
    throw forbidden();
  }
}

/** Only what the response schema names goes out; a field it does not know is an error in the code. */
function present(contract: AnyContract, reply: unknown): Presented {
  const status = contract.status ?? 200;
  if (isFile(reply)) return { status, file: reply };
  if (typeof contract.response === 'string') return { status: contract.status ?? 204 };
  return { status, json: contract.response.parse(reply) };
}

function send(contract: AnyContract, response: Response, reply: Presented): void {
  response.status(reply.status);
  if (reply.file) {
    const { contentType, filename, body } = reply.file;
    response.setHeader('Content-Type', contentType);
    response.setHeader('Content-Disposition', `attachment; filename="${filename.replace(/[^\w. -]/g, '_')}"`);
    response.end(body);
  } else if (reply.json === undefined) {
    response.end();
  } else {
    const text = JSON.stringify(reply.json);
    response.setHeader('Content-Type', 'application/json; charset=utf-8');
    response.setHeader('Content-Length', Buffer.byteLength(text));
    response.end(text);
  }
  if (contract.secret) response.locals.secret = true;
}
