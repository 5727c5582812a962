import type { ChangeReason } from '../../../shared/api/rotations.ts';

/** Why somebody changes a passphrase, as the choices of a form. */
export const REASON_CHOICES: readonly { value: ChangeReason; label: string }[] = [
  { value: 'routine', label: 'It is time' },
  { value: 'departure', label: 'Somebody who knows it has left' },
  { value: 'lost_card', label: 'A card was lost' },
  { value: 'leak', label: 'The passphrase leaked' },
  { value: 'dismissal', label: 'Somebody was dismissed' },
];
