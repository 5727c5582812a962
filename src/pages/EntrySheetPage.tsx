import { useQuery } from '@tanstack/react-query';
import { Link, type LoaderFunctionArgs, useNavigate, useParams } from 'react-router-dom';
import type { RotationView } from '../../shared/api/rotations.ts';
import { may } from '../../shared/rules/permissions.ts';
import { ButtonLink } from '../components/Button.tsx';
import { DateTime } from '../components/DateTime.tsx';
import { Page } from '../components/Page.tsx';
import { PageState } from '../components/PageState.tsx';
import { SafeText } from '../components/SafeText.tsx';
import { Attention, Sentence } from '../components/Sentence.tsx';
import { sessionQuery } from '../features/auth/queries.ts';
import { EntrySheet } from '../features/rotations/EntrySheet.tsx';
import { InForce } from '../features/rotations/InForce.tsx';
import { tryWords } from '../features/rotations/outcomeWords.ts';
import { rotationQuery } from '../features/rotations/queries.ts';
import { vesselQuery } from '../features/vessels/queries.ts';
import { startLoad } from '../lib/queryClient.ts';
import { useTitle } from '../lib/useTitle.ts';

export function entrySheetLoader({ params }: LoaderFunctionArgs) {
  startLoad(rotationQuery(params.vesselId ?? '', params.rotationId ?? ''));
  return null;
}

/** `/vessels/:vesselId/entry/:rotationId` */
export function EntrySheetPage() {
  const { vesselId = '', rotationId = '' } = useParams();
  const query = useQuery(rotationQuery(vesselId, rotationId));
  const vessel = useQuery(vesselQuery(vesselId));
  const session = useQuery(sessionQuery);
  useTitle('Entry sheet', vessel.data?.name);
  const roles = session.data?.memberships.find((one) => one.vesselId === vesselId)?.roles ?? [];
  return (
    <Page>
      <PageState query={query} loading="Fetching the change…" failed="The change could not be fetched.">
        {(rotation) => (
          <>
            <Link
              to={`/vessels/${vesselId}/networks/${rotation.networkId}`}
              className="-my-2 self-start py-2 text-deep underline-offset-4 hover:underline"
            >
              Back to <SafeText>{rotation.ssid}</SafeText>
            </Link>
            <Sheet
              key={rotation.id}
              vesselId={vesselId}
              rotation={rotation}
              zone={vessel.data?.zone ?? 'UTC'}
              mayEnter={may(roles, 'rotation.enter')}
            />
          </>
        )}
      </PageState>
    </Page>
  );
}

interface SheetProps {
  vesselId: string;
  rotation: RotationView;
  zone: string;
  mayEnter: boolean;
}

function Sheet({ vesselId, rotation, zone, mayEnter }: SheetProps) {
  const navigate = useNavigate();
  const name = <SafeText>{rotation.ssid}</SafeText>;
  const back = rotation.reasons.some(({ code }) => code === 'going_back');
  const networkPath = `/vessels/${vesselId}/networks/${rotation.networkId}`;
  switch (rotation.state) {
    case 'live':
      return (
        <>
          <Sentence
            action={
              <ButtonLink kind="primary" to={networkPath}>
                Go to the network
              </ButtonLink>
            }
          >
            {name} {back ? 'is back on the passphrase before' : 'has its new passphrase'}. {rotation.sentence}
          </Sentence>
          <p>
            {rotation.liveAt ? (
              <>
                In force since <DateTime at={rotation.liveAt} zone={zone} as="words" />.{' '}
              </>
            ) : null}
            Whoever uses it has to join again once, and so do televisions and tablets.{' '}
            {back ? 'The one that was given up' : 'The passphrase before'} no longer works.
          </p>
          <InForce {...{ vesselId, rotation, zone, mayEnter }} />
        </>
      );
    case 'drifted':
      return (
        <>
          <Sentence>
            {name} is <Attention>not the same everywhere</Attention>. {rotation.sentence}
          </Sentence>
          <InForce {...{ vesselId, rotation, zone, mayEnter }} />
        </>
      );
    case 'retired':
    case 'cancelled':
    case 'superseded':
      return (
        <Sentence action={<ButtonLink to={networkPath}>Go to the network</ButtonLink>}>
          There is nothing to enter any more for this change of {name}. {rotation.sentence}
        </Sentence>
      );
    default:
      return rotation.may.enter ? (
        <>
          <Sentence>
            <OpenSentence rotation={rotation} />
          </Sentence>
          <Meanwhile rotation={rotation} zone={zone} />
          <EntrySheet
            {...{ vesselId, rotation, zone }}
            onGivenUp={(next) =>
              void navigate(next.may.enter ? `/vessels/${vesselId}/entry/${next.id}` : networkPath)
            }
          />
        </>
      ) : (
        <Waiting rotation={rotation} zone={zone} mayEnter={mayEnter} />
      );
  }
}

function OpenSentence({ rotation }: { rotation: RotationView }) {
  const left = rotation.of - rotation.verified;
  const name = <SafeText>{rotation.ssid}</SafeText>;
  if (rotation.state === 'unknown') {
    return (
      <>
        It is <Attention>not yet known</Attention> which passphrase {name} runs. Enter the new one at{' '}
        {left === 1 ? 'the access point that is' : `the ${left} access points that are`} not confirmed.
      </>
    );
  }
  if (rotation.verified > 0) {
    return (
      <>
        {rotation.verified} of {rotation.of} access points of {name} {rotation.verified === 1 ? 'is' : 'are'}{' '}
        confirmed. {left === 1 ? 'One is' : `${left} are`} still to do.
      </>
    );
  }
  if (rotation.reasons.some(({ code }) => code === 'going_back')) {
    return (
      <>
        Put the passphrase before back into {left === 1 ? 'the access point' : `the ${left} access points`} of{' '}
        {name}, and type it back for each.
      </>
    );
  }
  return (
    <>
      Enter the new passphrase of {name} into {left === 1 ? 'its access point' : `its ${left} access points`},
      and type it back for each.
    </>
  );
}

/** What holds while it is being entered: what somebody wrote down, what to try, how long there is. */
function Meanwhile({ rotation, zone }: { rotation: RotationView; zone: string }) {
  const trying = tryWords(rotation);
  if (!rotation.detail && !trying && !rotation.reportBy) return null;
  return (
    <div className="-mt-3 flex max-w-2xl flex-col gap-1">
      {rotation.detail ? (
        <p>
          <SafeText>{rotation.detail}</SafeText>
        </p>
      ) : null}
      {trying ? <p>{trying}</p> : null}
      {rotation.reportBy && rotation.state !== 'unknown' ? (
        <p className="text-soft">
          Unless it is confirmed by <DateTime at={rotation.reportBy} zone={zone} as="words" />, it counts as
          not yet known.
        </p>
      ) : null}
    </div>
  );
}

function Waiting({ rotation, zone, mayEnter }: Omit<SheetProps, 'vesselId'>) {
  const name = <SafeText>{rotation.ssid}</SafeText>;
  if (!mayEnter) {
    return (
      <Sentence>
        The captain or the ETO enters the new passphrase of {name}. {rotation.sentence}
      </Sentence>
    );
  }
  return (
    <Sentence>
      There is nothing to enter for {name} yet.{' '}
      {rotation.state === 'planned' ? (
        <>
          Its new passphrase is made a day before the change, which is planned for{' '}
          <DateTime at={rotation.dueAt} zone={zone} as="words" />.
        </>
      ) : (
        <>
          The boat carries this change out by itself, <DateTime at={rotation.dueAt} zone={zone} as="words" />.
          The sheet opens if that fails.
        </>
      )}
    </Sentence>
  );
}
