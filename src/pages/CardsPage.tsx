import { useInfiniteQuery, useQuery } from '@tanstack/react-query';
import { type LoaderFunctionArgs, useParams, useSearchParams } from 'react-router-dom';
import type { CardState } from '../../shared/api/cards.ts';
import { Select } from '../components/inputs.tsx';
import { Page, Section } from '../components/Page.tsx';
import { Empty, Failed, Loading, PageState, TooMany } from '../components/PageState.tsx';
import { Attention, Sentence } from '../components/Sentence.tsx';
import { sessionQuery } from '../features/auth/queries.ts';
import { CardTable } from '../features/cards/CardTable.tsx';
import { PrintForm } from '../features/cards/PrintForm.tsx';
import { cardsQuery, printableNetworksQuery } from '../features/cards/queries.ts';
import { vesselQuery } from '../features/vessels/queries.ts';
import { startLoad } from '../lib/queryClient.ts';
import { useTitle } from '../lib/useTitle.ts';

const STATES: readonly { value: CardState | ''; label: string }[] = [
  { value: '', label: 'Every state' },
  { value: 'printed', label: 'Printed' },
  { value: 'handed_over', label: 'Handed over' },
  { value: 'returned', label: 'Returned' },
  { value: 'lost', label: 'Lost' },
  { value: 'void', label: 'Void' },
];

export function cardsLoader({ params }: LoaderFunctionArgs) {
  startLoad(printableNetworksQuery(params.vesselId ?? ''));
  return null;
}

/** `/vessels/:vesselId/cards` */
export function CardsPage() {
  const { vesselId = '' } = useParams();
  const [params, setParams] = useSearchParams();
  const wish = {
    state: STATES.find(({ value }) => value === params.get('state'))?.value ?? ('' as const),
    networkId: params.get('network') ?? '',
  };
  const { data: session } = useQuery(sessionQuery);
  const { data: vessel } = useQuery(vesselQuery(vesselId));
  const networks = useQuery(printableNetworksQuery(vesselId));
  const cards = useInfiniteQuery(cardsQuery(vesselId, wish));
  const roles = session?.memberships.find((one) => one.vesselId === vesselId)?.roles ?? [];
  const counts = cards.data?.pages[0]?.counts;
  const rows = cards.data?.pages.flatMap((page) => page.cards) ?? [];
  useTitle('Cards');
  const choose = (key: 'state' | 'network', value: string) =>
    setParams(
      (before) => {
        const after = new URLSearchParams(before);
        if (value) after.set(key, value);
        else after.delete(key);
        return after;
      },
      { replace: true },
    );
  return (
    <Page>
      <Sentence>
        {counts ? (
          <>
            {counts.handed_over === 1 ? '1 card is' : `${counts.handed_over} cards are`} in people's hands,{' '}
            {counts.printed === 1 ? '1 is' : `${counts.printed} are`} printed and waiting.
            {counts.lost > 0 ? (
              <>
                {' '}
                <Attention>{counts.lost === 1 ? '1 is lost.' : `${counts.lost} are lost.`}</Attention>
              </>
            ) : null}
          </>
        ) : (
          'Join cards: print them, and keep track of each.'
        )}
      </Sentence>
      <Section title="Print">
        <PageState
          query={networks}
          loading="Fetching the networks…"
          failed="The networks could not be fetched."
        >
          {(data) => <PrintForm vesselId={vesselId} roles={roles} networks={data.networks} />}
        </PageState>
      </Section>
      <Section title="Cards so far">
        <div className="flex flex-wrap gap-4">
          <Select
            label="State"
            value={wish.state}
            options={STATES}
            onChange={(event) => choose('state', event.target.value)}
          />
          <Select
            label="Network"
            value={wish.networkId}
            options={[
              { value: '', label: 'Every network' },
              ...(networks.data?.networks ?? []).map(({ id, ssid }) => ({ value: id, label: ssid })),
            ]}
            onChange={(event) => choose('network', event.target.value)}
          />
        </div>
        {cards.isPending ? <Loading>Fetching the cards…</Loading> : null}
        {cards.error && !cards.data ? (
          <Failed
            error={cards.error}
            title="The cards could not be fetched."
            onRetry={() => void cards.refetch()}
          />
        ) : null}
        {cards.data && rows.length === 0 ? (
          <Empty title={wish.state || wish.networkId ? 'No card matches.' : 'No card has been printed yet.'}>
            {wish.state || wish.networkId
              ? 'Choose another state or network.'
              : 'Print the first ones above.'}
          </Empty>
        ) : null}
        {rows.length > 0 ? <CardTable vesselId={vesselId} zone={vessel?.zone ?? 'UTC'} cards={rows} /> : null}
        {cards.hasNextPage ? (
          <TooMany
            shown={rows.length}
            busy={cards.isFetchingNextPage}
            onMore={() => void cards.fetchNextPage()}
          >
            Choose a state or a network to see fewer.
          </TooMany>
        ) : null}
      </Section>
    </Page>
  );
}
