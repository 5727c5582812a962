import { authRoutes } from './auth/routes.ts';
import { fleetRoutes } from './fleet/routes.ts';
import type { Endpoint } from './http/endpoint.ts';
import { rotationRoutes } from './rotations/routes.ts';
import { vesselRoutes } from './vessels/routes.ts';

/** Every route of the server: the only list, from which the OpenAPI document and the permission test are made. */
export const endpoints: readonly Endpoint[] = [
  ...authRoutes,
  ...fleetRoutes,
  ...rotationRoutes,
  ...vesselRoutes,
];
