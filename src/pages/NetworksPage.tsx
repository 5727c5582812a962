import { useQuery } from '@tanstack/react-query';
import { lazy, Suspense, useState } from 'react';
import { type LoaderFunctionArgs, useNavigate, useParams } from 'react-router-dom';
import type { NetworkView } from '../../shared/api/networks.ts';
import { hasStarted } from '../../shared/rules/hasStarted.ts';
import { may } from '../../shared/rules/permissions.ts';
import { Button, ButtonLink } from '../components/Button.tsx';
import { Page, Section } from '../components/Page.tsx';
import { Empty, Loading, PageState } from '../components/PageState.tsx';
import { Sentence } from '../components/Sentence.tsx';
import { sessionQuery } from '../features/auth/queries.ts';
import { NetworkRow } from '../features/networks/NetworkRow.tsx';
import { NetworksSentence, worstOf } from '../features/networks/NetworksSentence.tsx';
import { networksQuery } from '../features/networks/queries.ts';
import { reasonLine } from '../features/networks/reasonWords.ts';
import { awaitsEntry } from '../features/networks/words.ts';
import { ChangeNowDialog } from '../features/rotations/ChangeNowDialog.tsx';
import { PlanDialog } from '../features/rotations/PlanDialog.tsx';
import { rotationsQuery, voyagesQuery } from '../features/rotations/queries.ts';
import { SixWeeks } from '../features/rotations/SixWeeks.tsx';
import { vesselQuery } from '../features/vessels/queries.ts';
import { CalendarDialog } from '../features/voyages/CalendarDialog.tsx';
import { useNow } from '../lib/clock.ts';
import { startLoad } from '../lib/queryClient.ts';
import { useTitle } from '../lib/useTitle.ts';

const NetworkForm = lazy(async () => ({
  default: (await import('../features/networks/NetworkForm.tsx')).NetworkForm,
}));

export function networksLoader({ params }: LoaderFunctionArgs) {
  const vesselId = params.vesselId ?? '';
  startLoad(networksQuery(vesselId));
  startLoad(rotationsQuery(vesselId));
  startLoad(voyagesQuery(vesselId));
  return null;
}

type Asked = { what: 'change' | 'plan'; networkId: string } | { what: 'add' | 'calendar' } | null;

/** `/vessels/:vesselId/networks` */
export function NetworksPage() {
  const { vesselId = '' } = useParams();
  const query = useQuery(networksQuery(vesselId));
  const vessel = useQuery(vesselQuery(vesselId));
  const rotations = useQuery(rotationsQuery(vesselId));
  const voyages = useQuery(voyagesQuery(vesselId));
  const session = useQuery(sessionQuery);
  const navigate = useNavigate();
  const now = useNow();
  const [asked, setAsked] = useState<Asked>(null);
  useTitle('Networks', vessel.data?.name);
  const zone = vessel.data?.zone ?? 'UTC';
  const calendar = voyages.data?.voyages ?? [];
  const roles = session.data?.memberships.find((one) => one.vesselId === vesselId)?.roles ?? [];
  const mayEdit = may(roles, 'networks.edit');
  const close = () => setAsked(null);
  const add = mayEdit ? <Button onClick={() => setAsked({ what: 'add' })}>Add a network</Button> : null;

  return (
    <Page>
      <PageState query={query} loading="Fetching the networks…" failed="The networks could not be fetched.">
        {({ networks, crossingUntil }) => {
          const worst = worstOf(networks, now);
          const chosen =
            asked && 'networkId' in asked ? networks.find(({ id }) => id === asked.networkId) : undefined;
          if (networks.length === 0) {
            return (
              <>
                <Sentence>No network is listed yet.</Sentence>
                <Empty title="Add the first one." action={add}>
                  Give each network its name as phones show it, say who it is for, then type in the passphrase
                  in force or let Quayword make one.
                </Empty>
              </>
            );
          }
          return (
            <>
              <Sentence action={add}>
                <NetworksSentence networks={networks} zone={zone} />
              </Sentence>
              <ul className="m-0 list-none border-t border-rule p-0">
                {networks.map((network) => (
                  <NetworkRow
                    key={network.id}
                    vesselId={vesselId}
                    network={network}
                    zone={zone}
                    voyages={calendar}
                    mayEnter={may(roles, 'rotation.enter')}
                    crossingUntil={crossingUntil}
                    actions={
                      <Actions
                        {...{ vesselId, network }}
                        primary={network === worst}
                        mayEnter={may(roles, 'rotation.enter')}
                        held={network.carriesEquipment && crossingUntil !== null}
                        onAsk={setAsked}
                      />
                    }
                  />
                ))}
              </ul>
              <Section
                title="Next six weeks"
                action={
                  may(roles, 'voyages.edit') && voyages.data ? (
                    <Button onClick={() => setAsked({ what: 'calendar' })}>Edit the calendar</Button>
                  ) : null
                }
              >
                <PageState
                  query={rotations}
                  loading="Fetching the plan…"
                  failed="The plan could not be fetched."
                >
                  {(list) => <SixWeeks {...{ vesselId, zone }} rotations={list} voyages={calendar} />}
                </PageState>
                {voyages.error && !voyages.data ? (
                  <p className="text-sm text-soft">
                    The calendar could not be fetched; only changes are shown.
                  </p>
                ) : null}
              </Section>
              {asked?.what === 'change' && chosen ? (
                <ChangeNowDialog {...{ vesselId, zone, crossingUntil }} network={chosen} onClose={close} />
              ) : null}
              {asked?.what === 'plan' && chosen ? (
                <PlanDialog
                  {...{ vesselId, zone }}
                  network={chosen}
                  why={
                    chosen.change
                      ? reasonLine(chosen.change.reasons, {
                          zone,
                          now,
                          dueAt: chosen.change.dueAt,
                          audience: chosen.audience,
                          quiet: chosen.policy.quietHours.length > 0,
                          voyages: calendar,
                        })
                      : ''
                  }
                  onClose={close}
                />
              ) : null}
            </>
          );
        }}
      </PageState>
      {asked?.what === 'calendar' ? (
        <CalendarDialog {...{ vesselId, zone }} voyages={calendar} onClose={close} />
      ) : null}
      {asked?.what === 'add' ? (
        <Suspense fallback={<Loading>Opening the form…</Loading>}>
          <NetworkForm
            vesselId={vesselId}
            network={null}
            onClose={close}
            onSaved={(network) => void navigate(`/vessels/${vesselId}/networks/${network.id}`)}
          />
        </Suspense>
      ) : null}
    </Page>
  );
}

interface ActionsProps {
  vesselId: string;
  network: NetworkView;
  /** The one that needs it. */
  primary: boolean;
  mayEnter: boolean;
  /** A crossing keeps its equipment from losing their link: it can only be planned. */
  held: boolean;
  onAsk: (asked: Asked) => void;
}

/** What can be done with a network now: change or plan it, or go on with the change that is under way. */
function Actions({ vesselId, network, primary, mayEnter, held, onAsk }: ActionsProps) {
  const now = useNow();
  const { change } = network;
  const started = change !== null && hasStarted(change);
  const entry = change !== null && (started || awaitsEntry(change, now));
  const called = `for ${network.ssid}`;
  return (
    <>
      {entry && mayEnter ? (
        <ButtonLink
          kind={primary ? 'primary' : 'secondary'}
          to={`/vessels/${vesselId}/entry/${change.id}`}
          aria-label={`Open the entry sheet, ${called}`}
        >
          Open the entry sheet
        </ButtonLink>
      ) : null}
      {network.may.plan && !entry ? (
        <Button
          kind={primary && !held ? 'primary' : 'secondary'}
          aria-label={`Change now, ${called}`}
          onClick={() => onAsk({ what: 'change', networkId: network.id })}
        >
          Change now
        </Button>
      ) : null}
      {network.may.plan && !started ? (
        <Button aria-label={`Plan, ${called}`} onClick={() => onAsk({ what: 'plan', networkId: network.id })}>
          Plan
        </Button>
      ) : null}
    </>
  );
}
