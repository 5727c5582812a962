import { readSession } from '../../shared/api/session.ts';
import { endpoint } from '../http/endpoint.ts';
import { presentSession } from './presentSession.ts';

export const sessionRoutes = [
  endpoint(readSession, {
    handle: ({ services, tx, actor, request }) => presentSession(services, tx, actor, request),
  }),
];
