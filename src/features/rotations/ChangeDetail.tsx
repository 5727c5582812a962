import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import type { RotationView } from '../../../shared/api/rotations.ts';
import { hasStarted } from '../../../shared/rules/hasStarted.ts';
import { Button, ButtonLink } from '../../components/Button.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { PageState } from '../../components/PageState.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { SegmentProgress } from '../../components/SegmentProgress.tsx';
import { Attention } from '../../components/Sentence.tsx';
import { RowName, Table, Td, Th } from '../../components/Table.tsx';
import { cx } from '../../lib/cx.ts';
import { sentenceFor } from '../../lib/errors.ts';
import { GiveUpDialog } from './GiveUpDialog.tsx';
import { isConfirmed, outcomeWords, tryWords } from './outcomeWords.ts';
import { goOn, rotationQuery, vesselKey } from './queries.ts';

interface ChangeDetailProps {
  vesselId: string;
  rotationId: string;
  zone: string;
  /** Why it happens when it does, in words. */
  why: string;
}

/** One change: how far it is, what to try meanwhile, what each access point runs, and what can be done. */
export function ChangeDetail({ vesselId, rotationId, zone, why }: ChangeDetailProps) {
  const query = useQuery(rotationQuery(vesselId, rotationId));
  return (
    <PageState query={query} loading="Fetching the change…" failed="The change could not be fetched.">
      {(rotation) => <Detail {...{ vesselId, rotation, zone, why }} />}
    </PageState>
  );
}

function Detail({
  vesselId,
  rotation,
  zone,
  why,
}: Omit<ChangeDetailProps, 'rotationId'> & { rotation: RotationView }) {
  const client = useQueryClient();
  const { say } = useNotices();
  const [givingUp, setGivingUp] = useState(false);
  const resume = useMutation({
    mutationFn: () => goOn(vesselId, rotation.id),
    onSuccess: () => client.invalidateQueries({ queryKey: vesselKey(vesselId) }),
    onError: (error) => say(sentenceFor(error)),
  });
  const started = hasStarted(rotation);
  const settled = rotation.state === 'live' || rotation.state === 'drifted';
  const trying = tryWords(rotation);
  const worrying = ['unknown', 'needs_somebody', 'drifted'].includes(rotation.state);
  return (
    <div className="flex flex-col gap-3">
      <p>
        {worrying ? <Attention>{rotation.sentence}</Attention> : rotation.sentence}
        {rotation.detail ? (
          <>
            {' '}
            <SafeText>{rotation.detail}</SafeText>
          </>
        ) : null}
      </p>
      {settled ? null : (
        <p className="text-soft">
          {started ? 'Due ' : 'Planned for '}
          <DateTime at={rotation.dueAt} zone={zone} as="words" />
          {why ? `, ${why}` : ''}.
          {rotation.mode === 'urgent' ? ' Urgent: it does not wait for two ways aboard.' : ''}
        </p>
      )}
      {trying ? <p>{trying}</p> : null}
      {rotation.reportBy && started ? (
        <p className="text-soft">
          Without a report by <DateTime at={rotation.reportBy} zone={zone} as="words" /> it counts as not yet
          known.
        </p>
      ) : null}
      {started || rotation.state === 'drifted' ? <Outcomes {...{ rotation, zone, started }} /> : null}
      <div className="flex flex-wrap gap-3">
        {rotation.may.enter || settled ? (
          <ButtonLink
            kind={started ? 'primary' : 'secondary'}
            to={`/vessels/${vesselId}/entry/${rotation.id}`}
          >
            {settled ? 'See the access points' : 'Open the entry sheet'}
          </ButtonLink>
        ) : null}
        {rotation.may.goOn ? (
          <Button onClick={() => resume.mutate()} busy={resume.isPending && 'One moment…'}>
            Let the boat go on
          </Button>
        ) : null}
        {rotation.may.giveUp ? <Button onClick={() => setGivingUp(true)}>Give up this change</Button> : null}
      </div>
      {givingUp ? (
        <GiveUpDialog
          vesselId={vesselId}
          rotation={rotation}
          onClose={() => setGivingUp(false)}
          onGivenUp={() => setGivingUp(false)}
        />
      ) : null}
    </div>
  );
}

/** Access point by access point, what was last seen and when. */
function Outcomes({ rotation, zone, started }: { rotation: RotationView; zone: string; started: boolean }) {
  if (rotation.accessPoints.length === 0) return null;
  return (
    <>
      <SegmentProgress
        done={rotation.verified}
        total={rotation.of}
        label="Access points confirmed"
        className="max-w-md"
      />
      <Table
        caption={started ? 'How far each access point is' : 'What each access point runs'}
        head={
          <>
            <Th>Access point</Th>
            <Th>Deck</Th>
            <Th>What is known</Th>
            <Th>Since</Th>
          </>
        }
      >
        {rotation.accessPoints.map((point) => (
          <tr key={point.id}>
            <RowName>
              <SafeText>{point.name}</SafeText>
            </RowName>
            <Td>{point.deck ? <SafeText>{point.deck}</SafeText> : ''}</Td>
            <Td
              attention={point.seen === 'other' || point.seen === 'unreachable'}
              className={cx(isConfirmed(point) && 'text-shore-ink')}
            >
              {outcomeWords(point)}
            </Td>
            <Td>{point.seenAt ? <DateTime at={point.seenAt} zone={zone} as="moment" /> : ''}</Td>
          </tr>
        ))}
      </Table>
    </>
  );
}
