import { useQuery } from '@tanstack/react-query';
import { type LoaderFunctionArgs, useNavigate, useParams, useSearchParams } from 'react-router-dom';
import { useNotices } from '../components/Notices.tsx';
import { Page } from '../components/Page.tsx';
import { PageState } from '../components/PageState.tsx';
import { Sentence } from '../components/Sentence.tsx';
import { ImportList } from '../features/arrivals/ImportList.tsx';
import { arrivalsQuery } from '../features/arrivals/queries.ts';
import { startLoad } from '../lib/queryClient.ts';
import { useTitle } from '../lib/useTitle.ts';

export function importLoader({ params }: LoaderFunctionArgs) {
  startLoad(arrivalsQuery(params.vesselId ?? ''));
  return null;
}

/** `/vessels/:vesselId/arrivals/import` */
export function ImportPage() {
  const { vesselId = '' } = useParams();
  const [params] = useSearchParams();
  const navigate = useNavigate();
  const { say } = useNotices();
  const query = useQuery({ ...arrivalsQuery(vesselId), refetchInterval: false });
  useTitle("A party's list");
  return (
    <Page>
      <Sentence>
        Add a party from its list. You see and correct what was read before anything is stored.
      </Sentence>
      <PageState query={query} loading="Fetching the parties…" failed="The parties could not be fetched.">
        {(arrivals) => (
          <ImportList
            vesselId={vesselId}
            arrivals={arrivals}
            partyId={params.get('party')}
            onAdded={(partyId, added) => {
              say(added === 1 ? '1 guest is on the list.' : `${added} guests are on the list.`);
              void navigate(`/vessels/${vesselId}/arrivals?party=${partyId}`);
            }}
          />
        )}
      </PageState>
    </Page>
  );
}
