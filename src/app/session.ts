import { useQuery } from '@tanstack/react-query';
import { type LoaderFunctionArgs, redirect, replace } from 'react-router-dom';
import { sessionQuery } from '../features/auth/queries.ts';
import { ApiError } from '../lib/errors.ts';
import { queryClient } from '../lib/queryClient.ts';
import { rememberPlace } from '../lib/rememberedPlace.ts';
import { firstPlace, vesselPlaces } from './places.ts';

/** Lets only signed-in people further; others sign in and come back to where they were going. */
export async function sessionLoader({ request }: LoaderFunctionArgs) {
  try {
    return await queryClient.ensureQueryData(sessionQuery);
  } catch (error) {
    if (!(error instanceof ApiError) || error.status !== 401) throw error;
    const { pathname, search } = new URL(request.url);
    rememberPlace(pathname + search);
    throw replace('/sign-in');
  }
}

/** `/` leads to the person's first place. */
export async function firstPlaceLoader(args: LoaderFunctionArgs) {
  return redirect(firstPlace(await sessionLoader(args)));
}

/** A vessel's own address leads to the first of its pages the person may see. */
export async function vesselFirstPlaceLoader(args: LoaderFunctionArgs) {
  const session = await sessionLoader(args);
  const membership = session.memberships.find(({ vesselId }) => vesselId === args.params.vesselId);
  const place = membership && vesselPlaces(membership.vesselId, membership.roles)[0];
  return redirect(place?.to ?? '/account');
}

/** The session; only for what stands below `sessionLoader`. */
export function useSession() {
  const { data } = useQuery(sessionQuery);
  if (!data) throw new ApiError({ code: 'not_signed_in', detail: 'Please sign in.' }, 401);
  return data;
}
