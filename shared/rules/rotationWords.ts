import type { RotationState } from '../api/common.ts';

interface Told {
  readonly state: RotationState;
  readonly driver: 'by_hand' | 'rehearsal';
  /** Access points verified on the new passphrase, of how many. */
  readonly verified: number;
  readonly of: number;
  readonly handedOut: boolean;
  /** Goes back from a change that was handed out. */
  readonly takesOver: boolean;
}

/** A change's state as a sentence people understand; never rounds "not yet known" up or down. */
export function rotationSentence({ state, driver, verified, of, handedOut, takesOver }: Told): string {
  const points = `${verified} of ${of} access points ${verified === 1 && of === 1 ? 'has' : 'have'} the new passphrase`;
  switch (state) {
    case 'planned':
      return 'Planned. The passphrase in force stays until then.';
    case 'staged':
      return takesOver
        ? 'Going back to the passphrase before. Until every access point is confirmed, try both.'
        : 'The new passphrase is ready. The one in force stays until the change.';
    case 'handed_out':
      return driver === 'by_hand'
        ? 'The entry sheet has been opened. Confirm each access point as you go.'
        : 'Sent to the boat, not yet confirmed.';
    case 'applying':
      return `${points}. The old one still works on the others.`;
    case 'unknown':
      return `We do not know yet. Try the new passphrase, then the old one. ${points} for certain.`;
    case 'needs_somebody':
      return handedOut
        ? `Somebody has to look at this. ${points}.`
        : 'Somebody has to enter the new passphrase. The old one is in force until then.';
    case 'reconciling':
      return 'The server was restored. What the access points run is being checked.';
    case 'live':
      return `In force, confirmed on ${of === 1 ? 'its access point' : `all ${of} access points`}.`;
    case 'drifted':
      return `In force, but ${of - verified} of ${of} access points run something else.`;
    case 'retired':
      return 'Retired: a newer passphrase is in force.';
    case 'cancelled':
      return 'Cancelled before anything was changed.';
    case 'superseded':
      return 'Given up for a newer change.';
  }
}
