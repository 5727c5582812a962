import { useQuery } from '@tanstack/react-query';
import { type LoaderFunctionArgs, useParams } from 'react-router-dom';
import type { CrewView } from '../../shared/api/crew.ts';
import { may } from '../../shared/rules/permissions.ts';
import { Page } from '../components/Page.tsx';
import { Empty, PageState } from '../components/PageState.tsx';
import { Attention, Sentence } from '../components/Sentence.tsx';
import { sessionQuery } from '../features/auth/queries.ts';
import { CrewList } from '../features/crew/CrewList.tsx';
import { OwnCode } from '../features/crew/OwnCode.tsx';
import { crewQuery, ownPageQuery } from '../features/crew/queries.ts';
import { vesselQuery } from '../features/vessels/queries.ts';
import { startLoad } from '../lib/queryClient.ts';
import { useTitle } from '../lib/useTitle.ts';

export function crewLoader({ params }: LoaderFunctionArgs) {
  startLoad(ownPageQuery(params.vesselId ?? ''));
  return null;
}

/** `/vessels/:vesselId/crew`: one's own code for everybody, the crew list for those who keep it. */
export function CrewPage() {
  const { vesselId = '' } = useParams();
  const { data: session } = useQuery(sessionQuery);
  const { data: vessel } = useQuery(vesselQuery(vesselId));
  const roles = session?.memberships.find((one) => one.vesselId === vesselId)?.roles ?? [];
  const keepsList = may(roles, 'crew.view');
  const own = useQuery(ownPageQuery(vesselId));
  const list = useQuery({ ...crewQuery(vesselId), enabled: keepsList });
  const zone = vessel?.zone ?? 'UTC';
  useTitle(keepsList ? 'Crew' : 'Crew Wi-Fi');
  return (
    <Page>
      {keepsList ? (
        <PageState query={list} loading="Fetching the crew…" failed="The crew list could not be fetched.">
          {({ aboard, signedOff }) => (
            <>
              <Sentence>
                <CrewSentence aboard={aboard} signedOff={signedOff} />
              </Sentence>
              <CrewList
                vesselId={vesselId}
                zone={zone}
                aboard={aboard}
                signedOff={signedOff}
                mayManage={may(roles, 'crew.manage')}
              />
            </>
          )}
        </PageState>
      ) : (
        <Sentence>The crew network, for your own devices.</Sentence>
      )}
      <PageState
        query={own}
        loading="Fetching the crew network…"
        failed="The crew network could not be fetched."
        isEmpty={({ networks }) => networks.length === 0}
        empty={
          keepsList ? null : (
            <Empty title="No crew network has been entered yet.">Ask the ETO or the captain.</Empty>
          )
        }
      >
        {({ networks }) => (
          <>
            {keepsList ? <h2 className="text-lg">For your own devices</h2> : null}
            {networks.map((network) => (
              <OwnCode key={network.networkId} vesselId={vesselId} zone={zone} network={network} />
            ))}
          </>
        )}
      </PageState>
    </Page>
  );
}

function CrewSentence({
  aboard,
  signedOff,
}: {
  aboard: readonly CrewView[];
  signedOff: readonly CrewView[];
}) {
  const still = signedOff.filter(({ holds }) => holds.length > 0).length;
  const crew = aboard.length === 1 ? '1 crew member is aboard.' : `${aboard.length} crew members are aboard.`;
  if (still === 0) return <>{crew} Nobody who has signed off holds a passphrase in force.</>;
  return (
    <>
      {crew}{' '}
      <Attention>
        {still === 1
          ? '1 person who has signed off still holds'
          : `${still} people who have signed off still hold`}{' '}
        a passphrase in force.
      </Attention>
    </>
  );
}
