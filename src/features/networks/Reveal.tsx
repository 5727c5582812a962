import { useQueryClient } from '@tanstack/react-query';
import { useCallback } from 'react';
import type { Revealed } from '../../../shared/api/passphrases.ts';
import { Button } from '../../components/Button.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { PassphraseWords } from '../../components/Passphrase.tsx';
import { QrCode } from '../../components/QrCode.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { sentenceFor } from '../../lib/errors.ts';
import { useSecret } from '../../lib/useSecret.ts';
import { networkQuery, reveal } from './queries.ts';

interface RevealProps {
  vesselId: string;
  networkId: string;
  zone: string;
}

/**
 * The passphrases that may work now, in the order to try them, each as words and as a code; hidden behind a press
 * that the server logs, and gone again after 30 seconds (R29).
 */
export function Reveal({ vesselId, networkId, zone }: RevealProps) {
  const client = useQueryClient();
  const fetchSecret = useCallback(async () => {
    const shown = await reveal(vesselId, networkId);
    // Whoever reads it holds it, so the list of holders has grown.
    void client.invalidateQueries({ queryKey: networkQuery(vesselId, networkId).queryKey });
    return shown;
  }, [client, vesselId, networkId]);
  const { stage, show, hide } = useSecret(fetchSecret);
  if (stage.kind === 'shown') {
    return (
      <div className="flex flex-col gap-4">
        <Codes revealed={stage.value} zone={zone} />
        <div className="flex items-center gap-2 text-sm text-soft">
          <span role="status">Hides itself in {stage.left} s</span>
          <Button kind="quiet" onClick={hide}>
            Hide now
          </Button>
        </div>
      </div>
    );
  }
  return (
    <div className="flex flex-col items-start gap-2">
      <Button onClick={() => void show()} busy={stage.kind === 'fetching' && 'Fetching…'}>
        Show the passphrase
      </Button>
      {stage.kind === 'failed' ? (
        <p role="alert" className="text-sm font-medium text-magenta">
          {sentenceFor(stage.error)}
        </p>
      ) : (
        <p className="text-sm text-soft">
          Showing it is written to the log, and makes you one of those who hold it. It hides itself after 30
          seconds.
        </p>
      )}
    </div>
  );
}

function Codes({ revealed, zone }: { revealed: Revealed; zone: string }) {
  return (
    <ol className="m-0 flex list-none flex-col gap-5 p-0">
      {revealed.codes.map((code) => (
        <li key={code.passphraseId} className="flex flex-wrap items-center gap-x-6 gap-y-3">
          <QrCode
            text={code.payload}
            label="Code that joins this network"
            className="w-36 shrink-0 rounded-sm"
          />
          <div className="flex min-w-0 flex-col gap-1">
            <p className="text-sm text-soft">
              {code.words}
              {code.since ? (
                <>
                  , since <DateTime at={code.since} zone={zone} />
                </>
              ) : null}
            </p>
            <p className="text-2xl leading-snug">
              <PassphraseWords>{code.passphrase}</PassphraseWords>
            </p>
            <p className="text-sm text-soft">
              Joins <SafeText>{revealed.ssid}</SafeText>
              {revealed.hidden ? ', which does not show itself in lists' : ''}
            </p>
          </div>
        </li>
      ))}
    </ol>
  );
}
