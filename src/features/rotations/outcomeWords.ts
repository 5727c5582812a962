import type { RotationView } from '../../../shared/api/rotations.ts';

type Point = RotationView['accessPoints'][number];

/** Whether an access point is confirmed on the new passphrase: seen on it, not merely sent it. */
export const isConfirmed = ({ seen, evidence }: Point): boolean =>
  seen === 'new' && (evidence === 'E1' || evidence === 'E2');

/** What is known of one access point, never rounded up: "New passphrase, typed back". */
export function outcomeWords(point: Point): string {
  switch (point.seen) {
    case null:
      return 'Not yet known';
    case 'new':
      if (point.evidence === 'E2') return 'New passphrase, typed back';
      return point.evidence === 'E1' ? 'New passphrase, read back' : 'Sent, not yet confirmed';
    case 'old':
      return 'Still the old passphrase';
    case 'other':
      return 'Runs something else';
    case 'unreachable':
      return 'Could not be reached';
  }
}

/** Which passphrases to try and in which order, as a sentence; null where only the one in force is left. */
export function tryWords({ toTry, state, reasons, handedOutAt }: RotationView): string | null {
  const back = reasons.some(({ code }) => code === 'going_back');
  // Before the sheet was opened nothing has left, so only the one in force can be running.
  const left = back || handedOutAt !== null || state === 'drifted';
  if (toTry.length < 2 || !left) return null;
  const names = back
    ? { new: 'the one that is being put back', old: 'the one that was given up' }
    : { new: 'the new passphrase', old: 'the old one' };
  const [first = 'new', second = 'old'] = toTry;
  const unknown = state === 'unknown' ? 'It is not yet known which one works. ' : '';
  return `${unknown}Whoever wants to join tries ${names[first]} first, then ${names[second]}.`;
}
