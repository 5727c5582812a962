import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';
import type { By } from './by.ts';
import type { KnownRotation } from './lockRotation.ts';
import { takeStep } from './takeStep.ts';

/** Marks a change as waiting for somebody, with what to do. */
export async function askForSomebody(
  services: Services,
  tx: Tx,
  known: KnownRotation,
  why: string,
  by: By,
): Promise<KnownRotation> {
  return takeStep(services, tx, known, { kind: 'needSomebody', why }, by);
}
