import { useMutation, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import type { ArrivalsView, GuestView } from '../../../shared/api/arrivals.ts';
import { Button } from '../../components/Button.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { sentenceFor } from '../../lib/errors.ts';
import { GuestDialog } from './GuestDialog.tsx';
import { guestCalled } from './guestWords.ts';
import { arrivalsKey, guestAshore, guestBack } from './queries.ts';

/** What else can be done about a guest: correct the entry, mark as gone, or back. */
export function GuestActions({
  vesselId,
  arrivals,
  guest,
}: {
  vesselId: string;
  arrivals: ArrivalsView;
  guest: GuestView;
}) {
  const client = useQueryClient();
  const { say, undoable } = useNotices();
  const [editing, setEditing] = useState(false);
  const refresh = () => client.invalidateQueries({ queryKey: arrivalsKey(vesselId) });
  const back = useMutation({
    mutationFn: () => guestBack(vesselId, guest.id),
    onSuccess: async () => {
      await refresh();
      say(<SafeText>{`${guestCalled(guest)} is aboard.`}</SafeText>);
    },
    onError: (error) => say(sentenceFor(error)),
  });
  const ashore = useMutation({
    mutationFn: () => guestAshore(vesselId, guest.id),
    onSuccess: async () => {
      await refresh();
      undoable(<SafeText>{`${guestCalled(guest)} is ashore.`}</SafeText>, () => back.mutate());
    },
    onError: (error) => say(sentenceFor(error)),
  });
  return (
    <div className="-ml-4 flex flex-wrap gap-x-2">
      {guest.ashoreAt ? (
        <Button kind="quiet" onClick={() => back.mutate()} busy={back.isPending && 'One moment…'}>
          Aboard again
        </Button>
      ) : (
        <Button kind="quiet" onClick={() => ashore.mutate()} busy={ashore.isPending && 'One moment…'}>
          Ashore
        </Button>
      )}
      <Button kind="quiet" onClick={() => setEditing(true)}>
        Correct the entry
      </Button>
      {editing ? (
        <GuestDialog
          vesselId={vesselId}
          arrivals={arrivals}
          guest={guest}
          partyId={guest.partyId}
          onClose={() => setEditing(false)}
        />
      ) : null}
    </div>
  );
}
