import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { NetworkView } from '../../../shared/api/networks.ts';
import type { ChangeReason, RotationView } from '../../../shared/api/rotations.ts';
import { Button, ButtonLink } from '../../components/Button.tsx';
import { Caution } from '../../components/Caution.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { Checkbox, Select } from '../../components/inputs.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { sentenceFor } from '../../lib/errors.ts';
import { carriedOutQuery, changeNow, vesselKey } from './queries.ts';
import { REASON_CHOICES } from './reasons.ts';

interface ChangeNowDialogProps {
  vesselId: string;
  zone: string;
  network: NetworkView;
  /** A crossing is on until then. */
  crossingUntil: string | null;
  onClose: () => void;
}

function likelyReason({ leaks, holders }: NetworkView): ChangeReason {
  if (leaks.some(({ kind }) => kind === 'reported')) return 'leak';
  if (leaks.length > 0) return 'lost_card';
  return holders.departed > 0 ? 'departure' : 'routine';
}

/** Changes a network's passphrase now: says first what will happen, then what is to be done. */
export function ChangeNowDialog({ vesselId, zone, network, crossingUntil, onClose }: ChangeNowDialogProps) {
  const client = useQueryClient();
  const carriedOut = useQuery(carriedOutQuery(vesselId));
  const [reason, setReason] = useState<ChangeReason>(() => likelyReason(network));
  const [urgent, setUrgent] = useState(false);
  const start = useMutation({
    mutationFn: () => changeNow(vesselId, network.id, { reason, urgent }),
    onSuccess: () => client.invalidateQueries({ queryKey: vesselKey(vesselId) }),
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (!start.isPending) start.mutate();
  };
  const title = (
    <>
      Change <SafeText>{network.ssid}</SafeText> now
    </>
  );
  if (start.data) {
    return (
      <Dialog open onClose={onClose} title={title}>
        <Started vesselId={vesselId} rotation={start.data} onClose={onClose} />
      </Dialog>
    );
  }
  const held = network.carriesEquipment && crossingUntil !== null;
  const points = carriedOut.data?.accessPoints.length ?? 0;
  const holders = network.holders.current + network.holders.departed;
  return (
    <Dialog open onClose={onClose} title={title} keepOpen>
      {held ? (
        <Caution>
          A crossing is on until <DateTime at={crossingUntil} zone={zone} as="words" />, and this network
          carries equipment that could lose its link under way. It is not changed until then. Plan it for when
          you are in port.
        </Caution>
      ) : (
        <form onSubmit={submit} noValidate className="flex flex-col gap-4">
          <ol className="ml-5 flex list-decimal flex-col gap-1.5">
            <li>Quayword makes a new passphrase at once. Nobody is cut off by that.</li>
            <li>
              {carriedOut.data?.driver === 'by_hand'
                ? `The captain or the ETO enters it into ${points === 1 ? 'the access point' : `the ${points} access points`} by hand, from the entry sheet.`
                : carriedOut.data
                  ? 'The boat gives it to the access points by itself and reports back.'
                  : 'It goes into the access points: the boat does it by itself, or somebody enters it by hand.'}
            </li>
            <li>
              {holders > 0
                ? `${holders === 1 ? '1 person holds' : `${holders} people hold`} the passphrase in force. Every phone, tablet and television on this network has to join again.`
                : 'Every phone, tablet and television on this network has to join again.'}
            </li>
          </ol>
          {network.carriesEquipment ? (
            <Caution>
              This network carries equipment. Change it in port and with the ETO: whatever is on it loses its
              link until it has the new passphrase. The maker's instructions come first.
            </Caution>
          ) : null}
          <Select
            label="Why"
            value={reason}
            onChange={(event) => setReason(event.target.value as ChangeReason)}
            options={REASON_CHOICES}
          />
          <Checkbox
            label="Urgent"
            hint="For a dismissal or a stolen tablet. The boat does not wait until two ways aboard to learn the new passphrase are confirmed. You answer for that by name, so you may be asked to confirm it is you."
            checked={urgent}
            onChange={(event) => setUrgent(event.target.checked)}
          />
          {start.error ? (
            <p role="alert" className="text-sm font-medium text-magenta">
              {sentenceFor(start.error)}
            </p>
          ) : null}
          <div className="flex flex-wrap justify-end gap-3">
            <Button onClick={onClose}>Not now</Button>
            <Button type="submit" kind="primary" busy={start.isPending && 'Starting…'}>
              Change it now
            </Button>
          </div>
        </form>
      )}
    </Dialog>
  );
}

function Started({
  vesselId,
  rotation,
  onClose,
}: {
  vesselId: string;
  rotation: RotationView;
  onClose: () => void;
}) {
  const byHand = rotation.driver === 'by_hand';
  return (
    <div className="flex flex-col gap-4" role="status">
      <p>{rotation.sentence}</p>
      {byHand ? (
        <p>
          {rotation.may.enter
            ? 'Now enter it into the access points. The old passphrase works until then.'
            : 'The captain or the ETO now enters it into the access points. Tell them; the old passphrase works until then.'}
        </p>
      ) : (
        <p>
          Until every access point is confirmed, the screens list both passphrases in the order to try them.
        </p>
      )}
      <div className="flex flex-wrap justify-end gap-3">
        <Button onClick={onClose}>Close</Button>
        {byHand && rotation.may.enter ? (
          <ButtonLink kind="primary" to={`/vessels/${vesselId}/entry/${rotation.id}`}>
            Open the entry sheet
          </ButtonLink>
        ) : null}
      </div>
    </div>
  );
}
