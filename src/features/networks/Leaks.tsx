import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { NetworkView } from '../../../shared/api/networks.ts';
import { NOTE_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { TextArea } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { Attention } from '../../components/Sentence.tsx';
import { fieldError, sentenceFor } from '../../lib/errors.ts';
import { reportLeak, vesselKey, withdrawLeak } from './queries.ts';

/** Lost cards and reported leaks of the passphrase in force, with the ways to report one and to withdraw it. */
export function Leaks({ vesselId, network, zone }: { vesselId: string; network: NetworkView; zone: string }) {
  const client = useQueryClient();
  const { say } = useNotices();
  const [reporting, setReporting] = useState(false);
  const withdraw = useMutation({
    mutationFn: (leakId: string) => withdrawLeak(vesselId, network.id, leakId),
    onSuccess: async () => {
      await client.invalidateQueries({ queryKey: vesselKey(vesselId) });
      say('Withdrawn. The report and its withdrawal stay in the log.');
    },
    onError: (error) => say(sentenceFor(error)),
  });
  return (
    <div className="flex flex-col items-start gap-2">
      {network.leaks.length > 0 ? (
        <ul className="m-0 w-full list-none p-0">
          {network.leaks.map((leak) => (
            <li
              key={leak.id}
              className="flex flex-wrap items-center justify-between gap-x-4 border-b border-rule py-1.5"
            >
              <span>
                <Attention>
                  {leak.kind === 'lost_card' ? `Card ${leak.serial ?? ''} lost` : 'Leak reported'}
                </Attention>
                , <DateTime at={leak.at} zone={zone} />
                {leak.note ? (
                  <>
                    : <SafeText>{leak.note}</SafeText>
                  </>
                ) : null}
              </span>
              {leak.kind === 'reported' ? (
                <Button
                  kind="quiet"
                  onClick={() => withdraw.mutate(leak.id)}
                  busy={withdraw.isPending && withdraw.variables === leak.id && 'Withdrawing…'}
                >
                  It was a mistake
                </Button>
              ) : null}
            </li>
          ))}
        </ul>
      ) : null}
      {network.live ? <Button onClick={() => setReporting(true)}>Report that it leaked</Button> : null}
      {reporting ? (
        <ReportDialog vesselId={vesselId} network={network} onClose={() => setReporting(false)} />
      ) : null}
    </div>
  );
}

function ReportDialog({
  vesselId,
  network,
  onClose,
}: {
  vesselId: string;
  network: NetworkView;
  onClose: () => void;
}) {
  const client = useQueryClient();
  const { say } = useNotices();
  const [note, setNote] = useState('');
  const report = useMutation({
    mutationFn: () => reportLeak(vesselId, network.id, note.trim()),
    onSuccess: async () => {
      await client.invalidateQueries({ queryKey: vesselKey(vesselId) });
      say('Reported. The network is exposed until its passphrase changes.');
      onClose();
    },
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (!report.isPending) report.mutate();
  };
  const field = fieldError(report.error, 'note');
  return (
    <Dialog
      open
      onClose={onClose}
      title={
        <>
          <SafeText>{network.ssid}</SafeText>: it leaked
        </>
      }
      keepOpen
    >
      <form onSubmit={submit} noValidate className="flex flex-col gap-4">
        <p>
          Say so when somebody who should not know the passphrase may know it: a photograph of a card, a chat,
          a stolen tablet.{' '}
          {network.policy.onLeak
            ? 'The network counts as exposed, and its change moves up.'
            : 'The network counts as exposed. Its rules do not move the change up for a leak, so change it by hand.'}
        </p>
        <TextArea
          label="What happened"
          hint="May be left empty. Do not write the passphrase here."
          value={note}
          maxLength={NOTE_MAX}
          onChange={(event) => setNote(event.target.value)}
          error={field}
        />
        {report.error && !field ? (
          <p role="alert" className="text-sm font-medium text-magenta">
            {sentenceFor(report.error)}
          </p>
        ) : null}
        <div className="flex flex-wrap justify-end gap-3">
          <Button onClick={onClose}>Cancel</Button>
          <Button type="submit" kind="attention" busy={report.isPending && 'Reporting…'}>
            Report the leak
          </Button>
        </div>
      </form>
    </Dialog>
  );
}
