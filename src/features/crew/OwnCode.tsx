import { useQueryClient } from '@tanstack/react-query';
import { useCallback } from 'react';
import type { OwnPage } from '../../../shared/api/crew.ts';
import { Button } from '../../components/Button.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { Flag } from '../../components/Flag.tsx';
import { PassphraseWords } from '../../components/Passphrase.tsx';
import { QrCode } from '../../components/QrCode.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { useSecret } from '../../lib/useSecret.ts';
import { ownPageQuery, readOwnCode } from './queries.ts';

interface OwnCodeProps {
  vesselId: string;
  zone: string;
  network: OwnPage['networks'][number];
}

const SHOWN_SECONDS = 60;

/** The crew network on one's own phone: when it changed, when next, and its code behind a press. */
export function OwnCode({ vesselId, zone, network }: OwnCodeProps) {
  const client = useQueryClient();
  const read = useCallback(async () => {
    const code = await readOwnCode(vesselId, network.networkId);
    void client.invalidateQueries({ queryKey: ownPageQuery(vesselId).queryKey });
    return code;
  }, [client, vesselId, network.networkId]);
  const { stage, show, hide } = useSecret(read, SHOWN_SECONDS);
  return (
    <section className="flex max-w-xl flex-col items-start gap-4 border-b border-rule pb-8">
      <div className="flex items-center gap-4">
        <Flag audience="crew" size="large" word={false} />
        <div>
          <h2 className="text-xl">
            <SafeText>{network.ssid}</SafeText>
          </h2>
          <p className="text-sm text-soft">
            {network.since ? (
              <>
                In force since <DateTime at={network.since} zone={zone} />.
              </>
            ) : (
              'No passphrase is on record yet.'
            )}{' '}
            {network.nextChangeAt ? (
              <>
                It changes <DateTime at={network.nextChangeAt} zone={zone} as="words" />.
              </>
            ) : null}
          </p>
        </div>
      </div>
      {stage.kind === 'shown' ? (
        <>
          {stage.value.codes.map((code) => (
            <div key={code.passphraseId} className="flex w-full flex-col gap-3">
              {stage.value.codes.length > 1 ? <p className="font-medium">{code.words}</p> : null}
              <QrCode
                text={code.payload}
                label={`Code that joins ${network.ssid}`}
                className="w-full max-w-80 border border-rule"
              />
              <p className="text-2xl leading-snug">
                <PassphraseWords>{code.passphrase}</PassphraseWords>
              </p>
            </div>
          ))}
          <div className="flex items-center gap-2 text-sm text-soft">
            <span role="status">Hides itself in {stage.left} s</span>
            <Button kind="quiet" onClick={hide}>
              Hide now
            </Button>
          </div>
        </>
      ) : network.since ? (
        <>
          <Button
            kind="primary"
            size="large"
            wide
            onClick={() => void show()}
            busy={stage.kind === 'fetching' && 'Fetching…'}
          >
            Show the code
          </Button>
          <p className="text-sm text-soft">
            Reading it is written to the log. Pass it to nobody: whoever needs it asks the chief stew.{' '}
            {network.readAt ? (
              <>
                You read this one <DateTime at={network.readAt} zone={zone} as="words" />.
              </>
            ) : (
              'You have not read this one yet.'
            )}
          </p>
        </>
      ) : null}
      {stage.kind === 'failed' ? <ErrorLine error={stage.error} /> : null}
    </section>
  );
}
