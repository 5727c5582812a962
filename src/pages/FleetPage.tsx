import { useMutation, useQuery } from '@tanstack/react-query';
import { type LoaderFunctionArgs, useSearchParams } from 'react-router-dom';
import { FLEET_SORTS, type FleetSort, STANDINGS, type Standing } from '../../shared/rules/fleet.ts';
import { Button } from '../components/Button.tsx';
import { Select } from '../components/inputs.tsx';
import { Page } from '../components/Page.tsx';
import { Pager } from '../components/Pager.tsx';
import { Empty, PageState } from '../components/PageState.tsx';
import { Search } from '../components/Search.tsx';
import { Sentence } from '../components/Sentence.tsx';
import { AgePlot } from '../features/fleet/AgePlot.tsx';
import { FleetTable } from '../features/fleet/FleetTable.tsx';
import { exportFleet, type FleetWish, fleetQuery } from '../features/fleet/queries.ts';
import { sentenceFor } from '../lib/errors.ts';
import { startLoad } from '../lib/queryClient.ts';
import { useTitle } from '../lib/useTitle.ts';

const STANDING_WORDS: Record<Standing, string> = {
  in_order: 'In order',
  due: 'Due soon',
  overdue: 'Past their limit',
  exposed: 'Exposed',
};

function wishOf(params: URLSearchParams): FleetWish {
  const sort = params.get('sort');
  const standing = params.get('standing');
  return {
    sort: FLEET_SORTS.find((known): known is FleetSort => known === sort) ?? 'worst',
    standing: STANDINGS.find((known): known is Standing => known === standing) ?? '',
    search: params.get('search') ?? '',
    page: Math.max(1, Number(params.get('page')) || 1),
  };
}

export function fleetLoader({ request }: LoaderFunctionArgs) {
  startLoad(fleetQuery(wishOf(new URL(request.url).searchParams)));
  return null;
}

/** `/fleet` */
export function FleetPage() {
  const [params, setParams] = useSearchParams();
  const wish = wishOf(params);
  const query = useQuery(fleetQuery(wish));
  const csv = useMutation({ mutationFn: exportFleet });
  useTitle('Fleet');
  const change = (changes: Partial<FleetWish>) =>
    setParams(
      (before) => {
        const after = new URLSearchParams(before);
        for (const [key, value] of Object.entries({ page: '', ...changes })) {
          if (value === '' || value === 1 || value === 'worst') after.delete(key);
          else after.set(key, String(value));
        }
        return after;
      },
      { replace: true },
    );
  return (
    <Page>
      <PageState query={query} loading="Fetching the fleet…" failed="The fleet could not be fetched.">
        {(fleet) => (
          <>
            <Sentence
              action={
                <Button onClick={() => csv.mutate()} busy={csv.isPending && 'Preparing…'}>
                  Export as CSV
                </Button>
              }
            >
              {fleet.sentence}
            </Sentence>
            {csv.error ? <p role="alert">{sentenceFor(csv.error)}</p> : null}
            {fleet.figures.networks === 0 ? (
              <Empty title="No vessel is looked after yet.">Add the first one on the Vessels page.</Empty>
            ) : (
              <>
                <AgePlot dots={fleet.networks} />
                <div className="flex flex-wrap items-end gap-4">
                  <Search
                    label="Search vessels"
                    value={wish.search}
                    onChange={(search) => change({ search })}
                    className="w-full max-w-72"
                  />
                  <Select
                    label="Show"
                    value={wish.standing}
                    onChange={(event) => change({ standing: event.target.value as Standing | '' })}
                    options={[
                      { value: '', label: 'Every vessel' },
                      ...[...STANDINGS].reverse().map((value) => ({ value, label: STANDING_WORDS[value] })),
                    ]}
                  />
                  <p className="pb-3 text-sm text-soft" role="status">
                    {fleet.matching} of {fleet.figures.vessels} vessels, {fleet.figures.networks} networks
                  </p>
                </div>
                {fleet.vessels.length === 0 ? (
                  <Empty
                    title="No vessel matches."
                    action={
                      <Button onClick={() => change({ search: '', standing: '' })}>Show every vessel</Button>
                    }
                  />
                ) : (
                  <FleetTable rows={fleet.vessels} sort={wish.sort} onSort={(sort) => change({ sort })} />
                )}
                <Pager
                  label="Pages of the table"
                  page={fleet.page}
                  pages={Math.ceil(fleet.matching / fleet.limit)}
                  onPage={(page) => change({ page })}
                />
              </>
            )}
          </>
        )}
      </PageState>
    </Page>
  );
}
