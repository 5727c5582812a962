import { Link } from 'react-router-dom';
import type { NetworkView } from '../../../shared/api/networks.ts';
import type { RotationSummary } from '../../../shared/api/rotations.ts';
import type { VoyageView } from '../../../shared/api/voyages.ts';
import { hasStarted } from '../../../shared/rules/hasStarted.ts';
import { DateTime } from '../../components/DateTime.tsx';
import { SegmentProgress } from '../../components/SegmentProgress.tsx';
import { Attention } from '../../components/Sentence.tsx';
import { useNow } from '../../lib/clock.ts';
import { isLate, type ReasonContext, reasonWords } from './reasonWords.ts';
import { awaitsEntry, holdersWords, leakWords } from './words.ts';

interface ChangeLinesProps {
  vesselId: string;
  network: NetworkView;
  zone: string;
  voyages: readonly VoyageView[];
  /** Whether the person may enter passphrases into access points. */
  mayEnter: boolean;
}

/** When a network changes next and why, or how far the change under way is; then who holds it. */
export function ChangeLines(props: ChangeLinesProps) {
  const { network } = props;
  const { held, departed } = holdersWords(network);
  const leaks = leakWords(network.leaks);
  return (
    <div className="flex min-w-0 flex-col gap-0.5">
      <Next {...props} />
      {network.drift ? (
        <p>
          <Attention>{network.drift.sentence}</Attention> <SheetLink {...props} change={network.drift} />
        </p>
      ) : null}
      {network.live ? (
        <p>
          {held}
          {departed ? (
            <>
              , <Attention>{departed}</Attention>
            </>
          ) : null}
          {leaks ? (
            <>
              , <Attention>{leaks}</Attention>
            </>
          ) : null}
        </p>
      ) : null}
      {network.live?.grade === 'weak' ? (
        <p>
          <Attention>Weak passphrase</Attention>: {network.live.strength}
        </p>
      ) : null}
    </div>
  );
}

function Next(props: ChangeLinesProps) {
  const { network, zone, voyages } = props;
  const now = useNow();
  const { change } = network;
  if (!change) return <p className="text-soft">No change planned</p>;
  if (hasStarted(change)) {
    return (
      <>
        <UnderWay change={change} />
        <p>
          <SheetLink {...props} change={change} />
        </p>
      </>
    );
  }
  const context: ReasonContext = {
    zone,
    now,
    dueAt: change.dueAt,
    audience: network.audience,
    quiet: network.policy.quietHours.length > 0,
    voyages,
  };
  const waiting = awaitsEntry(change, now);
  return (
    <>
      <p className="text-base font-semibold">
        {waiting ? (
          'Ready to be entered'
        ) : (
          <>
            <DateTime at={change.dueAt} zone={zone} />
            {change.state === 'staged' ? <span className="font-normal text-soft">, ready</span> : null}
          </>
        )}
      </p>
      {waiting && !props.mayEnter ? <p className="text-soft">The captain or the ETO enters it.</p> : null}
      {change.reasons.map((reason) => (
        <p key={reason.code}>
          {isLate(reason) ? (
            <Attention>{reasonWords(reason, context)}</Attention>
          ) : (
            reasonWords(reason, context)
          )}
        </p>
      ))}
    </>
  );
}

const HEADINGS: Partial<Record<RotationSummary['state'], string>> = {
  staged: 'Going back',
  handed_out: 'Handed out, not yet confirmed',
  applying: 'Being changed now',
  unknown: 'Not yet known',
  needs_somebody: 'Needs somebody',
  reconciling: 'Being checked',
};

function UnderWay({ change }: { change: RotationSummary }) {
  const worrying = change.state === 'unknown' || change.state === 'needs_somebody';
  const heading = HEADINGS[change.state] ?? 'Under way';
  return (
    <>
      <p className="text-base font-semibold">{worrying ? <Attention>{heading}</Attention> : heading}</p>
      <p>{change.sentence}</p>
      {change.of > 0 ? (
        <SegmentProgress
          done={change.verified}
          total={change.of}
          label="Access points confirmed"
          className="my-1 max-w-48"
        />
      ) : null}
    </>
  );
}

/** The way to an access point that runs something else; for a change under way, who can go on with it. */
function SheetLink({ vesselId, change, mayEnter }: ChangeLinesProps & { change: RotationSummary }) {
  const drifted = change.state === 'drifted';
  if (!drifted && (mayEnter || change.driver !== 'by_hand')) return null;
  if (!mayEnter) return <span className="text-soft">The captain or the ETO enters it.</span>;
  return (
    <Link to={`/vessels/${vesselId}/entry/${change.id}`} className="text-deep underline underline-offset-4">
      See which access points
    </Link>
  );
}
