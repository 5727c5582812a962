import { useQuery } from '@tanstack/react-query';
import { useState } from 'react';
import { type LoaderFunctionArgs, useSearchParams } from 'react-router-dom';
import { Button } from '../components/Button.tsx';
import { Page } from '../components/Page.tsx';
import { Pager } from '../components/Pager.tsx';
import { Empty, PageState } from '../components/PageState.tsx';
import { SafeText } from '../components/SafeText.tsx';
import { Search } from '../components/Search.tsx';
import { Sentence } from '../components/Sentence.tsx';
import { type FleetWish, fleetQuery } from '../features/fleet/queries.ts';
import { VesselTable } from '../features/fleet/VesselTable.tsx';
import { AddVesselDialog } from '../features/vessels/AddVesselDialog.tsx';
import type { NewVessel } from '../features/vessels/queries.ts';
import { startLoad } from '../lib/queryClient.ts';
import { useTitle } from '../lib/useTitle.ts';

const wishOf = (params: URLSearchParams): FleetWish => ({
  sort: 'name',
  standing: '',
  search: params.get('search') ?? '',
  page: Math.max(1, Number(params.get('page')) || 1),
});

export function fleetVesselsLoader({ request }: LoaderFunctionArgs) {
  startLoad(fleetQuery(wishOf(new URL(request.url).searchParams)));
  return null;
}

/** `/fleet/vessels` */
export function FleetVesselsPage() {
  const [params, setParams] = useSearchParams();
  const wish = wishOf(params);
  const query = useQuery(fleetQuery(wish));
  const [adding, setAdding] = useState(false);
  const [added, setAdded] = useState<NewVessel | null>(null);
  useTitle('Vessels');
  const go = (changes: Record<string, string>) =>
    setParams(
      Object.entries({ search: wish.search, ...changes }).filter(([, value]) => value !== ''),
      { replace: true },
    );
  const add = (kind: 'primary' | 'secondary') => (
    <Button kind={kind} onClick={() => setAdding(true)}>
      Add a vessel
    </Button>
  );
  return (
    <Page>
      <PageState query={query} loading="Fetching the vessels…" failed="The vessels could not be fetched.">
        {(fleet) => (
          <>
            <Sentence action={add(fleet.figures.vessels === 0 ? 'primary' : 'secondary')}>
              {count(fleet.figures.vessels)} looked after by <SafeText>{fleet.dealer.name}</SafeText>.
            </Sentence>
            {added ? (
              <p role="status" className="max-w-3xl rounded-md bg-shoal px-4 py-3">
                <SafeText>{added.name}</SafeText> is in the fleet, and the invitation to{' '}
                <SafeText>{added.invited}</SafeText> is on its way. It works once, for three days; everything
                else of the vessel is her captain's to fill in.
              </p>
            ) : null}
            {fleet.figures.vessels === 0 ? (
              <Empty title="No vessel is looked after yet.">
                Add the first one; her captain gets an invitation by mail.
              </Empty>
            ) : (
              <>
                <div className="flex flex-wrap items-center gap-4">
                  <Search
                    label="Search vessels"
                    value={wish.search}
                    onChange={(search) => go({ search })}
                    className="w-full max-w-72"
                  />
                  <p className="text-sm text-soft" role="status">
                    {fleet.matching} of {fleet.figures.vessels} shown
                  </p>
                </div>
                {fleet.vessels.length === 0 ? (
                  <Empty
                    title="No vessel matches."
                    action={<Button onClick={() => go({ search: '' })}>Show every vessel</Button>}
                  />
                ) : (
                  <VesselTable rows={fleet.vessels} />
                )}
                <Pager
                  label="Pages of the list"
                  page={fleet.page}
                  pages={Math.ceil(fleet.matching / fleet.limit)}
                  onPage={(page) => go({ page: page > 1 ? String(page) : '' })}
                />
              </>
            )}
          </>
        )}
      </PageState>
      {adding ? (
        <AddVesselDialog
          onClose={() => setAdding(false)}
          onAdded={(vessel) => {
            setAdding(false);
            setAdded(vessel);
          }}
        />
      ) : null}
    </Page>
  );
}

const count = (vessels: number) =>
  vessels === 0 ? 'No vessel is' : vessels === 1 ? '1 vessel is' : `${vessels} vessels are`;
