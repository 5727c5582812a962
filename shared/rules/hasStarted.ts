import type { RotationState } from '../api/common.ts';
import type { PlanReason } from '../api/rotations.ts';
import { isUnderWay } from './rotation.ts';

/**
 * Whether a change can only be finished or given up any more: it has left for the boat, or it goes back from one
 * that had, so that access points may run either passphrase.
 */
export function hasStarted(change: { state: RotationState; reasons: readonly PlanReason[] }): boolean {
  return (
    isUnderWay(change.state) ||
    (change.state === 'staged' && change.reasons.some(({ code }) => code === 'going_back'))
  );
}
