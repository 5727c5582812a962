import { useState } from 'react';
import type { NetworkView } from '../../../shared/api/networks.ts';
import { AgeScale } from '../../components/AgeScale.tsx';
import { Button } from '../../components/Button.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { Attention } from '../../components/Sentence.tsx';
import { Reveal } from './Reveal.tsx';
import { TypeInDialog } from './TypeInDialog.tsx';

interface NetworkPassphraseProps {
  vesselId: string;
  network: NetworkView;
  zone: string;
}

/** The passphrase in force: its age and strength, the way to show it and the way to take down another. */
export function NetworkPassphrase({ vesselId, network, zone }: NetworkPassphraseProps) {
  const [typing, setTyping] = useState(false);
  const { live, may, policy } = network;
  return (
    <div className="flex flex-col gap-4">
      {live ? (
        <>
          <AgeScale days={live.ageDays} limitDays={policy.ageLimitDays} className="max-w-2xl" />
          <p>
            In force since <DateTime at={live.liveAt} zone={zone} />,{' '}
            {live.origin === 'generated' ? 'made by Quayword' : 'typed in by somebody'}.{' '}
            {live.grade === 'weak' ? (
              <>
                <Attention>Weak</Attention>:{' '}
              </>
            ) : (
              'Time to guess it: '
            )}
            {live.strength}.
          </p>
        </>
      ) : (
        <p>
          No passphrase is on record. Type in the one in force, or let Quayword make one by changing it now.
        </p>
      )}
      {live && may.reveal ? <Reveal vesselId={vesselId} networkId={network.id} zone={zone} /> : null}
      {live && !may.reveal ? (
        <p className="text-sm text-soft">Your role does not show this network's passphrase.</p>
      ) : null}
      {may.typeIn ? (
        <Button
          kind={live ? 'quiet' : 'secondary'}
          className={live ? '-ml-4 self-start' : 'self-start'}
          onClick={() => setTyping(true)}
        >
          {live ? 'Another one is in force: type it in' : 'Type in the one in force'}
        </Button>
      ) : null}
      {typing ? (
        <TypeInDialog
          zone={zone}
          vesselId={vesselId}
          networkId={network.id}
          ssid={network.ssid}
          onClose={() => setTyping(false)}
        />
      ) : null}
    </div>
  );
}
