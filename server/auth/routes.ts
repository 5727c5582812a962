import * as api from '../../shared/api/auth.ts';
import { readSession } from '../../shared/api/session.ts';
import { endpoint, openEndpoint } from '../http/endpoint.ts';
import { clearSessionCookie } from '../http/session.ts';
import {
  changePassword,
  clearSite,
  endDevice,
  endEverything,
  listDevices,
  preparePasswordChange,
  proveAgain,
  renewSession,
} from './account.ts';
import { acceptInvitation, invite, prepareAcceptance, readInvitation } from './invitations.ts';
import { listInvitations, listMembers, setRoles, withdrawInvitation } from './members.ts';
import { presentSession } from './presentSession.ts';
import { askForReset, prepareReset, useReset } from './resets.ts';
import { beginEnrolment, finishEnrolment, removeSecondFactor } from './secondFactor.ts';
import { endSessions } from './sessions.ts';
import { admitPerson, signIn } from './signIn.ts';

const who = (actor: { personId: string; name: string }) => ({ id: actor.personId, name: actor.name });

const sessionRoutes = [
  endpoint(readSession, {
    handle: ({ services, tx, actor, request }) => presentSession(services, tx, actor, request),
  }),
  openEndpoint(api.signIn, {
    prepare: ({ services, request, body }) => admitPerson(services, request, body),
    handle: ({ services, tx, request, response, prepared }) =>
      signIn(services, tx, { request, response, admitted: prepared }),
  }),
  endpoint(api.signOut, {
    handle: async ({ services, tx, actor, request, response }) => {
      await endDevice(services, tx, actor, actor.sessionPublicId);
      clearSessionCookie(response);
      clearSite(request, response);
      return undefined;
    },
  }),
  endpoint(api.proveIdentity, {
    prepare: ({ services, actor, body }) => proveAgain(services, actor, body),
    handle: async ({ services, tx, actor, response, prepared }) => {
      await renewSession(services, tx, actor, { proved: true, secondFactor: prepared, response });
      return undefined;
    },
  }),
];

const strangerRoutes = [
  openEndpoint(api.askForReset, {
    prepare: ({ services, request, body }) => askForReset(services, request, body.email),
    handle: async () => undefined,
  }),
  openEndpoint(api.resetPassword, {
    prepare: ({ services, body }) => prepareReset(services, body),
    handle: async ({ services, tx, body, prepared }) => {
      await useReset(services, tx, body.token, prepared);
      return undefined;
    },
  }),
  openEndpoint(api.readInvitation, {
    handle: ({ services, tx, body }) => readInvitation(services, tx, body.token),
  }),
  openEndpoint(api.acceptInvitation, {
    prepare: ({ services, request, body }) => prepareAcceptance(services, request, body),
    handle: async ({ services, tx, body, prepared }) => {
      await acceptInvitation(services, tx, body, prepared);
      return undefined;
    },
  }),
];

const accountRoutes = [
  endpoint(api.changeAccount, {
    handle: async ({ services, tx, actor, body, now }) => {
      await services.db.run(
        tx,
        'UPDATE people SET name = $name, locale = $locale, updated_at = $now WHERE id = $id',
        { ...body, now, id: actor.personId },
      );
      return undefined;
    },
  }),
  endpoint(api.changePassword, {
    prepare: ({ services, actor, body }) => preparePasswordChange(services, actor, body),
    handle: async ({ services, tx, actor, response, prepared }) => {
      await changePassword(services, tx, actor, { hash: prepared, response });
      return undefined;
    },
  }),
  endpoint(api.beginSecondFactor, {
    handle: ({ services, tx, actor }) =>
      beginEnrolment(services, tx, { id: actor.personId, email: actor.email }),
  }),
  endpoint(api.finishSecondFactor, {
    handle: async ({ services, tx, actor, body, now }) => {
      const recoveryCodes = await finishEnrolment(services, tx, actor.personId, body.code);
      await endSessions(services, tx, actor.personId, actor.sessionHash);
      await services.db.run(tx, 'UPDATE sessions SET second_factor_at = $now WHERE id_hash = $hash', {
        now,
        hash: actor.sessionHash,
      });
      return { recoveryCodes };
    },
  }),
  endpoint(api.removeSecondFactor, {
    prepare: ({ services, actor, body }) => proveAgain(services, actor, body),
    handle: async ({ services, tx, actor }) => {
      await removeSecondFactor(services, tx, actor.personId);
      await endSessions(services, tx, actor.personId, actor.sessionHash);
      return undefined;
    },
  }),
  endpoint(api.listDevices, {
    handle: async ({ services, tx, actor }) => ({ items: await listDevices(services, tx, actor) }),
  }),
  endpoint(api.endDevice, {
    handle: async ({ services, tx, actor, params }) => {
      await endDevice(services, tx, actor, params.sessionId);
      return undefined;
    },
  }),
  endpoint(api.endAllDevices, {
    handle: async ({ services, tx, actor, request, response }) => {
      await endEverything(services, tx, actor);
      clearSessionCookie(response);
      clearSite(request, response);
      return undefined;
    },
  }),
];

const memberRoutes = [
  endpoint(api.listMembers, {
    handle: async ({ services, tx, params }) => ({
      members: await listMembers(services, tx, params.vesselId),
      invitations: await listInvitations(services, tx, params.vesselId),
    }),
  }),
  endpoint(api.inviteMember, {
    handle: async ({ services, tx, actor, params, body }) => ({
      id: await invite(services, tx, { ...body, vesselId: params.vesselId, by: who(actor) }),
    }),
  }),
  endpoint(api.withdrawInvitation, {
    handle: async ({ services, tx, actor, params }) => {
      await withdrawInvitation(services, tx, { ...params, by: who(actor) });
      return undefined;
    },
  }),
  endpoint(api.setRoles, {
    handle: async ({ services, tx, actor, params, body }) => {
      await setRoles(services, tx, { ...params, ...body, by: who(actor) });
      return undefined;
    },
  }),
];

export const authRoutes = [...sessionRoutes, ...strangerRoutes, ...accountRoutes, ...memberRoutes];
