import { authRoutes } from './auth/routes.ts';
import { cardRoutes } from './cards/routes.ts';
import { crewRoutes } from './crew/routes.ts';
import { fleetRoutes } from './fleet/routes.ts';
import { handoverRoutes } from './handovers/routes.ts';
import type { Endpoint } from './http/endpoint.ts';
import { networkRoutes } from './networks/routes.ts';
import { passphraseRoutes } from './passphrases/routes.ts';
import { rotationRoutes } from './rotations/routes.ts';
import { vesselRoutes } from './vessels/routes.ts';
import { voyageRoutes } from './voyages/routes.ts';

/** Every route of the server: the only list, from which the OpenAPI document and the permission test are made. */
export const endpoints: readonly Endpoint[] = [
  ...authRoutes,
  ...fleetRoutes,
  ...rotationRoutes,
  ...vesselRoutes,
  ...networkRoutes,
  ...passphraseRoutes,
  ...crewRoutes,
  ...cardRoutes,
  ...voyageRoutes,
  ...handoverRoutes,
];
