import * as api from '../../shared/api/rotations.ts';
import { endpoint } from '../http/endpoint.ts';
import { acceptDrift, goOn, reportDrift, reportUnreachable } from './accessPointReports.ts';
import { cancelRotation } from './cancelRotation.ts';
import { changeNow, planFor } from './changeNow.ts';
import { confirmAccessPoint, countTry } from './confirmAccessPoint.ts';
import { giveUp } from './giveUp.ts';
import { listRotations } from './listRotations.ts';
import { moveRotation } from './moveRotation.ts';
import { openSheet } from './openSheet.ts';
import { viewRotation } from './present.ts';

export const rotationRoutes = [
  endpoint(api.listRotations, { handle: (context) => listRotations(context, context.query) }),
  endpoint(api.readRotation, {
    handle: ({ services, tx, actor, params, now }) =>
      viewRotation(services, tx, actor, params.rotationId, now),
  }),
  endpoint(api.changeNow, {
    handle: (context) => changeNow(context, context.params.networkId, context.body),
  }),
  endpoint(api.planFor, {
    handle: (context) =>
      planFor(context, context.params.networkId, { ...context.body, dueAt: new Date(context.body.dueAt) }),
  }),
  endpoint(api.moveRotation, {
    handle: (context) => moveRotation(context, context.params.rotationId, new Date(context.body.dueAt)),
  }),
  endpoint(api.cancelRotation, { handle: (context) => cancelRotation(context, context.params.rotationId) }),
  endpoint(api.giveUpRotation, { handle: (context) => giveUp(context, context.params.rotationId) }),
  endpoint(api.goOnRotation, { handle: (context) => goOn(context, context.params.rotationId) }),
  endpoint(api.openSheet, { handle: (context) => openSheet(context, context.params.rotationId) }),
  endpoint(api.confirmAccessPoint, {
    prepare: ({ services, actor, params }) => countTry(services, actor, params.rotationId),
    handle: (context) =>
      confirmAccessPoint(
        context,
        context.params.rotationId,
        context.params.accessPointId,
        context.body.typed,
      ),
  }),
  endpoint(api.reportUnreachable, {
    handle: (context) =>
      reportUnreachable(context, context.params.rotationId, context.params.accessPointId, context.body.note),
  }),
  endpoint(api.reportDrift, {
    handle: (context) =>
      reportDrift(context, context.params.rotationId, context.params.accessPointId, context.body.seen),
  }),
  endpoint(api.acceptDrift, {
    prepare: ({ services, actor, params }) => countTry(services, actor, params.rotationId),
    handle: (context) =>
      acceptDrift(context, context.params.rotationId, context.params.accessPointId, context.body.typed),
  }),
];
