import type { Verb } from '../http/verb.ts';

/** A change on one vessel: what its verb is given, with the vessel of the request. */
export interface Change extends Verb {
  readonly vesselId: string;
}

/** The change a request asks for. */
export const changeOf = ({
  services,
  tx,
  actor,
  now,
  params,
}: Verb & { readonly params: { readonly vesselId: string } }): Change => ({
  services,
  tx,
  actor,
  now,
  vesselId: params.vesselId,
});
