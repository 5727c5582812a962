import { useInfiniteQuery, useMutation, useQuery } from '@tanstack/react-query';
import { type LoaderFunctionArgs, useParams, useSearchParams } from 'react-router-dom';
import { LOG_KINDS } from '../../shared/rules/logKinds.ts';
import { may } from '../../shared/rules/permissions.ts';
import { Button } from '../components/Button.tsx';
import { ErrorLine } from '../components/ErrorLine.tsx';
import { Select, TextInput } from '../components/inputs.tsx';
import { Page, Section } from '../components/Page.tsx';
import { Empty, Failed, Loading, PageState, TooMany } from '../components/PageState.tsx';
import { Search } from '../components/Search.tsx';
import { Attention, Sentence } from '../components/Sentence.tsx';
import { sessionQuery } from '../features/auth/queries.ts';
import { Holders } from '../features/log/Holders.tsx';
import { LogList } from '../features/log/LogList.tsx';
import { exportLog, holdersQuery, type LogWish, logQuery } from '../features/log/queries.ts';
import { vesselQuery } from '../features/vessels/queries.ts';
import { startLoad } from '../lib/queryClient.ts';
import { fromLocal } from '../lib/shipLocal.ts';
import { useTitle } from '../lib/useTitle.ts';

const KINDS = Object.entries(LOG_KINDS)
  .map(([value, label]) => ({ value, label }))
  .sort((a, b) => a.label.localeCompare(b.label));

export function logLoader({ params }: LoaderFunctionArgs) {
  startLoad(holdersQuery(params.vesselId ?? ''));
  return null;
}

/** `/vessels/:vesselId/log` */
export function LogPage() {
  const { vesselId = '' } = useParams();
  const [params, setParams] = useSearchParams();
  const { data: session } = useQuery(sessionQuery);
  const { data: vessel } = useQuery(vesselQuery(vesselId));
  const zone = vessel?.zone ?? 'UTC';
  const roles = session?.memberships.find((one) => one.vesselId === vesselId)?.roles ?? [];
  const get = (key: string) => params.get(key) ?? '';
  // Whole days of ship's time: from the first one's midnight to the midnight after the last.
  const day = (key: 'from' | 'to') => (/^\d{4}-\d{2}-\d{2}$/.test(get(key)) ? get(key) : '');
  const nextDay = (date: string) =>
    new Date(Date.parse(`${date}T00:00:00Z`) + 86_400_000).toISOString().slice(0, 10);
  const wish: LogWish = {
    networkId: get('network'),
    kind: get('kind') in LOG_KINDS ? get('kind') : '',
    person: get('person'),
    from: day('from') ? (fromLocal(`${day('from')}T00:00`, zone) ?? '') : '',
    to: day('to') ? (fromLocal(`${nextDay(day('to'))}T00:00`, zone) ?? '') : '',
  };
  const holders = useQuery(holdersQuery(vesselId));
  const log = useInfiniteQuery(logQuery(vesselId, wish));
  const csv = useMutation({ mutationFn: () => exportLog(vesselId, wish) });
  const entries = log.data?.pages.flatMap((page) => page.entries) ?? [];
  useTitle('Log');
  const set = (key: string) => (event: { target: { value: string } }) =>
    setParams(
      (before) => {
        const after = new URLSearchParams(before);
        if (event.target.value) after.set(key, event.target.value);
        else after.delete(key);
        return after;
      },
      { replace: true },
    );
  const left = holders.data?.networks.reduce((sum, network) => sum + network.departed, 0);
  const narrowed = params.size > 0;
  return (
    <Page>
      <Sentence
        action={
          may(roles, 'log.export') ? (
            <Button onClick={() => csv.mutate()} busy={csv.isPending && 'Preparing…'}>
              Export as CSV
            </Button>
          ) : null
        }
      >
        {left === undefined ? (
          'Who was given which passphrase, when and by whom.'
        ) : left === 0 ? (
          'Nobody who has left holds a passphrase in force.'
        ) : (
          <Attention>
            {left === 1 ? '1 person who has left still holds' : `${left} people who have left still hold`} a
            passphrase in force.
          </Attention>
        )}
      </Sentence>
      <ErrorLine error={csv.error} />
      <Section title="Who holds what now">
        <PageState
          query={holders}
          loading="Fetching the holders…"
          failed="The holders could not be fetched."
          isEmpty={({ networks }) => networks.length === 0}
          empty={<Empty title="No network has been entered yet." />}
        >
          {(view) => <Holders view={view} />}
        </PageState>
      </Section>
      <Section title="Entries">
        <div className="grid items-end gap-4 sm:grid-cols-2 lg:grid-cols-5">
          <Search
            label="Search names"
            value={get('person')}
            onChange={(value) => set('person')({ target: { value } })}
          />
          <Select
            label="Network"
            value={wish.networkId}
            onChange={set('network')}
            options={[
              { value: '', label: 'Every network' },
              ...(holders.data?.networks ?? []).map(({ id, ssid }) => ({ value: id, label: ssid })),
            ]}
          />
          <Select
            label="What"
            value={wish.kind}
            onChange={set('kind')}
            options={[{ value: '', label: 'Everything' }, ...KINDS]}
          />
          <TextInput label="From" type="date" value={day('from')} onChange={set('from')} />
          <TextInput label="To" type="date" value={day('to')} onChange={set('to')} />
        </div>
        {log.isPending ? <Loading>Fetching the log…</Loading> : null}
        {log.error && !log.data ? (
          <Failed
            error={log.error}
            title="The log could not be fetched."
            onRetry={() => void log.refetch()}
          />
        ) : null}
        {log.data && entries.length === 0 ? (
          <Empty title={narrowed ? 'No entry matches.' : 'Nothing has happened yet.'}>
            {narrowed
              ? 'Choose fewer conditions.'
              : 'Every handover, print and change is written here by itself.'}
          </Empty>
        ) : null}
        {entries.length > 0 ? <LogList entries={entries} zone={log.data?.pages[0]?.zone ?? zone} /> : null}
        {log.hasNextPage ? (
          <TooMany
            shown={entries.length}
            busy={log.isFetchingNextPage}
            onMore={() => void log.fetchNextPage()}
          >
            Search a name or choose days to see fewer.
          </TooMany>
        ) : null}
      </Section>
    </Page>
  );
}
