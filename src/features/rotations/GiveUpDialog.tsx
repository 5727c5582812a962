import { useMutation, useQueryClient } from '@tanstack/react-query';
import type { RotationView } from '../../../shared/api/rotations.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { sentenceFor } from '../../lib/errors.ts';
import { giveUp, vesselKey } from './queries.ts';

interface GiveUpDialogProps {
  vesselId: string;
  rotation: RotationView;
  onClose: () => void;
  /** Given the change that takes over. */
  onGivenUp: (next: RotationView) => void;
}

/** Gives up a change under way, which means going back by a new one: says so before it happens. */
export function GiveUpDialog({ vesselId, rotation, onClose, onGivenUp }: GiveUpDialogProps) {
  const client = useQueryClient();
  const { say } = useNotices();
  const left = rotation.handedOutAt !== null;
  const give = useMutation({
    mutationFn: () => giveUp(vesselId, rotation.id),
    onSuccess: async (next) => {
      say(
        left
          ? 'Given up. Now the passphrase before goes back into the access points.'
          : 'Given up. Nothing was changed aboard.',
      );
      onGivenUp(next);
      await client.invalidateQueries({ queryKey: vesselKey(vesselId) });
    },
  });
  return (
    <Dialog open onClose={onClose} title="Give up this change?">
      {left ? (
        <>
          <p>
            Some access points may run the new passphrase already, so giving up is a change too: it goes back
            to the passphrase before, and every access point is confirmed on it like any other.
          </p>
          <p>Until then both may work, and the screens list both.</p>
        </>
      ) : (
        <p>Nothing has left yet. The new passphrase is dropped, and the plan sets the next change.</p>
      )}
      {give.error ? (
        <p role="alert" className="text-sm font-medium text-magenta">
          {sentenceFor(give.error)}
        </p>
      ) : null}
      <div className="flex flex-wrap justify-end gap-3">
        <Button onClick={onClose}>Go on with it</Button>
        <Button kind="attention" onClick={() => give.mutate()} busy={give.isPending && 'Giving up…'}>
          Give it up
        </Button>
      </div>
    </Dialog>
  );
}
