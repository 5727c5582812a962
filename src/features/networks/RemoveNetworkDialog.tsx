import { useMutation, useQueryClient } from '@tanstack/react-query';
import type { NetworkView } from '../../../shared/api/networks.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { sentenceFor } from '../../lib/errors.ts';
import { networkQuery, removeNetwork, vesselKey } from './queries.ts';

interface RemoveNetworkDialogProps {
  vesselId: string;
  network: NetworkView;
  onClose: () => void;
  /** Called before the network is forgotten here: the page that shows it is left first. */
  onRemoved: () => void | Promise<void>;
}

/** Takes a network off the vessel; what happened with it stays in the log. */
export function RemoveNetworkDialog({ vesselId, network, onClose, onRemoved }: RemoveNetworkDialogProps) {
  const client = useQueryClient();
  const remove = useMutation({
    mutationFn: () => removeNetwork(vesselId, network.id),
    onSuccess: async () => {
      await onRemoved();
      client.removeQueries({ queryKey: networkQuery(vesselId, network.id).queryKey });
      await client.invalidateQueries({ queryKey: vesselKey(vesselId) });
    },
  });
  return (
    <Dialog
      open
      onClose={onClose}
      title={
        <>
          Remove <SafeText>{network.ssid}</SafeText>?
        </>
      }
    >
      <p>
        Its plan ends, its cards are void, and Quayword no longer watches over it. The access points keep
        running it until somebody takes it out of them. Its log and history stay.
      </p>
      {remove.error ? (
        <p role="alert" className="text-sm font-medium text-magenta">
          {sentenceFor(remove.error)}
        </p>
      ) : null}
      <div className="flex flex-wrap justify-end gap-3">
        <Button onClick={onClose}>Keep it</Button>
        <Button kind="attention" onClick={() => remove.mutate()} busy={remove.isPending && 'Removing…'}>
          Remove it
        </Button>
      </div>
    </Dialog>
  );
}
