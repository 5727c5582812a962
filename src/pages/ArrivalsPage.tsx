import { useQuery } from '@tanstack/react-query';
import { useState } from 'react';
import { type LoaderFunctionArgs, useParams, useSearchParams } from 'react-router-dom';
import type { ArrivalsView } from '../../shared/api/arrivals.ts';
import { Button, ButtonLink } from '../components/Button.tsx';
import { Empty, PageState } from '../components/PageState.tsx';
import { Sentence } from '../components/Sentence.tsx';
import { GuestDialog } from '../features/arrivals/GuestDialog.tsx';
import { GuestList } from '../features/arrivals/GuestList.tsx';
import { nextToServe } from '../features/arrivals/guestWords.ts';
import { HandOverPanel } from '../features/arrivals/HandOverPanel.tsx';
import { PartyDialog } from '../features/arrivals/PartyDialog.tsx';
import { PartyHead } from '../features/arrivals/PartyHead.tsx';
import { PrintPartyDialog } from '../features/arrivals/PrintPartyDialog.tsx';
import { arrivalsQuery } from '../features/arrivals/queries.ts';
import { VisitorDialog } from '../features/arrivals/VisitorDialog.tsx';
import { startLoad } from '../lib/queryClient.ts';
import { useTitle } from '../lib/useTitle.ts';

export function arrivalsLoader({ params, request }: LoaderFunctionArgs) {
  startLoad(arrivalsQuery(params.vesselId ?? '', new URL(request.url).searchParams.get('party')));
  return null;
}

/** `/vessels/:vesselId/arrivals` */
export function ArrivalsPage() {
  const { vesselId = '' } = useParams();
  const [params] = useSearchParams();
  const query = useQuery(arrivalsQuery(vesselId, params.get('party')));
  useTitle('Arrivals');
  return (
    <PageState
      query={query}
      loading={<span className="px-4 sm:px-8">Fetching the party…</span>}
      failed="The party could not be fetched."
    >
      {(arrivals) => <Arrivals key={arrivals.party?.id ?? 'none'} vesselId={vesselId} arrivals={arrivals} />}
    </PageState>
  );
}

function Arrivals({ vesselId, arrivals }: { vesselId: string; arrivals: ArrivalsView }) {
  const [chosen, setChosen] = useState<string | null>(() => nextToServe(arrivals.guests, null)?.id ?? null);
  const [byItself, setByItself] = useState(false);
  const [dialog, setDialog] = useState<'visitor' | 'guest' | 'print' | 'party' | null>(null);
  const [open, setOpen] = useState(false);
  const everybody = [...arrivals.guests, ...arrivals.visitors];
  const guest = everybody.find(({ id }) => id === chosen) ?? null;
  const select = (guestId: string) => {
    setChosen(guestId);
    setByItself(false);
    setOpen(true);
  };
  const served = (guestId: string) => {
    const next = nextToServe(arrivals.guests, guestId);
    setByItself(true);
    if (next) setChosen(next.id);
    else setOpen(false);
  };
  const { party } = arrivals;
  return (
    <div className="grid grow min-[800px]:grid-cols-[1fr_21rem] min-[1100px]:grid-cols-[1fr_27.5rem]">
      <div className="flex min-w-0 flex-col gap-5 px-4 py-6 sm:px-8">
        {party ? (
          <>
            <PartyHead
              vesselId={vesselId}
              arrivals={arrivals}
              party={party}
              onAddGuest={() => setDialog('guest')}
              onPrintAll={() => setDialog('print')}
            />
            {arrivals.guests.length === 0 ? (
              <Empty
                title="Nobody is on this party's list yet."
                action={
                  <ButtonLink kind="primary" to={`/vessels/${vesselId}/arrivals/import?party=${party.id}`}>
                    Add the party's list
                  </ButtonLink>
                }
              >
                Upload the list you were sent, or add guests one by one.
              </Empty>
            ) : (
              <GuestList
                guests={arrivals.guests}
                zone={arrivals.zone}
                selected={chosen}
                onSelect={select}
                label="Guests by deck and cabin"
              />
            )}
          </>
        ) : (
          <>
            <Sentence>No party is on the calendar yet.</Sentence>
            <Empty
              title="Add the party that comes next."
              action={
                <div className="flex flex-wrap gap-3">
                  <ButtonLink kind="primary" to={`/vessels/${vesselId}/arrivals/import`}>
                    From a list
                  </ButtonLink>
                  <Button onClick={() => setDialog('party')}>By hand</Button>
                </div>
              }
            >
              With its list and times here, cards can be printed ahead and the guest network changes after it
              leaves.
            </Empty>
          </>
        )}
        {arrivals.visitors.length > 0 ? (
          <section className="flex flex-col gap-1">
            <h2 className="text-lg">Not on the list</h2>
            <GuestList
              guests={arrivals.visitors}
              zone={arrivals.zone}
              selected={chosen}
              onSelect={select}
              label="Visitors"
              visitors
            />
          </section>
        ) : null}
        <Button size="large" className="self-start" onClick={() => setDialog('visitor')}>
          Someone not on the list
        </Button>
      </div>
      <aside
        aria-label="Hand over"
        className={
          open
            ? 'bg-shoal px-4 py-6 max-[799px]:fixed max-[799px]:inset-0 max-[799px]:z-10 max-[799px]:overflow-auto sm:px-7'
            : 'hidden border-shallow bg-shoal px-7 py-6 min-[800px]:block min-[800px]:border-l'
        }
      >
        <div className="h-full min-[800px]:sticky min-[800px]:top-0 min-[800px]:h-auto min-[800px]:min-h-[calc(100dvh-9rem)] flex flex-col">
          {open ? (
            <Button
              kind="quiet"
              className="mb-2 self-start min-[800px]:hidden"
              onClick={() => setOpen(false)}
            >
              Back to the list
            </Button>
          ) : null}
          {guest ? (
            <HandOverPanel
              key={guest.id}
              vesselId={vesselId}
              arrivals={arrivals}
              guest={guest}
              byItself={byItself}
              onServed={served}
              onSelect={setChosen}
            />
          ) : (
            <p className="text-soft">Choose somebody to hand a card to.</p>
          )}
        </div>
      </aside>
      {dialog === 'visitor' ? (
        <VisitorDialog
          vesselId={vesselId}
          arrivals={arrivals}
          onClose={() => setDialog(null)}
          onAdded={select}
        />
      ) : null}
      {dialog === 'guest' && party ? (
        <GuestDialog
          vesselId={vesselId}
          arrivals={arrivals}
          guest={null}
          partyId={party.id}
          onClose={() => setDialog(null)}
        />
      ) : null}
      {dialog === 'print' ? (
        <PrintPartyDialog vesselId={vesselId} arrivals={arrivals} onClose={() => setDialog(null)} />
      ) : null}
      {dialog === 'party' ? (
        <PartyDialog vesselId={vesselId} zone={arrivals.zone} party={null} onClose={() => setDialog(null)} />
      ) : null}
    </div>
  );
}
