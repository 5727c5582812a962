import { useQuery } from '@tanstack/react-query';
import { lazy, Suspense, useState } from 'react';
import { Link, type LoaderFunctionArgs, useNavigate, useParams } from 'react-router-dom';
import type { NetworkDetail } from '../../shared/api/networks.ts';
import type { RotationSummary } from '../../shared/api/rotations.ts';
import type { VoyageView } from '../../shared/api/voyages.ts';
import { hasStarted } from '../../shared/rules/hasStarted.ts';
import { Button } from '../components/Button.tsx';
import { Flag } from '../components/Flag.tsx';
import { Page, Section } from '../components/Page.tsx';
import { Loading, PageState } from '../components/PageState.tsx';
import { Sentence } from '../components/Sentence.tsx';
import { NetworkFacts, PolicyFacts } from '../features/networks/Facts.tsx';
import { History } from '../features/networks/History.tsx';
import { Holders } from '../features/networks/Holders.tsx';
import { Leaks } from '../features/networks/Leaks.tsx';
import { NetworkPassphrase } from '../features/networks/NetworkPassphrase.tsx';
import { EquipmentLine } from '../features/networks/NetworkRow.tsx';
import { NetworkSentence } from '../features/networks/NetworksSentence.tsx';
import { networkQuery, networksQuery } from '../features/networks/queries.ts';
import { RemoveNetworkDialog } from '../features/networks/RemoveNetworkDialog.tsx';
import { reasonLine } from '../features/networks/reasonWords.ts';
import { AUDIENCE_LINE, holdersWords } from '../features/networks/words.ts';
import { ChangeDetail } from '../features/rotations/ChangeDetail.tsx';
import { ChangeNowDialog } from '../features/rotations/ChangeNowDialog.tsx';
import { PlanDialog } from '../features/rotations/PlanDialog.tsx';
import { rotationsQuery, voyagesQuery } from '../features/rotations/queries.ts';
import { vesselQuery } from '../features/vessels/queries.ts';
import { useNow } from '../lib/clock.ts';
import { startLoad } from '../lib/queryClient.ts';
import { useTitle } from '../lib/useTitle.ts';

const NetworkForm = lazy(async () => ({
  default: (await import('../features/networks/NetworkForm.tsx')).NetworkForm,
}));
const PolicyForm = lazy(async () => ({
  default: (await import('../features/networks/PolicyForm.tsx')).PolicyForm,
}));

export function networkLoader({ params }: LoaderFunctionArgs) {
  const { vesselId = '', networkId = '' } = params;
  startLoad(networkQuery(vesselId, networkId));
  startLoad(networksQuery(vesselId));
  startLoad(rotationsQuery(vesselId));
  startLoad(voyagesQuery(vesselId));
  return null;
}

/** `/vessels/:vesselId/networks/:networkId` */
export function NetworkPage() {
  const { vesselId = '', networkId = '' } = useParams();
  const query = useQuery(networkQuery(vesselId, networkId));
  const vessel = useQuery(vesselQuery(vesselId));
  useTitle(query.data?.ssid, vessel.data?.name);
  return (
    <Page className="gap-7">
      <Link
        to={`/vessels/${vesselId}/networks`}
        className="-my-2 self-start py-2 text-deep underline-offset-4 hover:underline"
      >
        Back to the networks
      </Link>
      <PageState query={query} loading="Fetching the network…" failed="This network could not be fetched.">
        {(network) => <Network vesselId={vesselId} network={network} zone={vessel.data?.zone ?? 'UTC'} />}
      </PageState>
    </Page>
  );
}

interface NetworkProps {
  vesselId: string;
  network: NetworkDetail;
  zone: string;
}

type Asked = 'change' | 'plan' | 'edit' | 'policy' | 'remove' | null;

function Network({ vesselId, network, zone }: NetworkProps) {
  const [asked, setAsked] = useState<Asked>(null);
  const all = useQuery(networksQuery(vesselId));
  const voyages = useQuery(voyagesQuery(vesselId));
  const calendar = voyages.data?.voyages ?? [];
  const navigate = useNavigate();
  const crossingUntil = all.data?.crossingUntil ?? null;
  const started = network.change !== null && hasStarted(network.change);
  const close = () => setAsked(null);
  const why = useWhy(network, zone, calendar);
  const { held, departed } = holdersWords(network);
  return (
    <>
      <div className="flex flex-col gap-2">
        <div className="flex items-center gap-3">
          <Flag audience={network.audience} size="large" word={false} />
          <span className="text-soft">{AUDIENCE_LINE[network.audience]}</span>
        </div>
        <Sentence
          action={
            network.may.plan && !started ? (
              <div className="flex gap-2">
                <Button kind="primary" onClick={() => setAsked('change')}>
                  Change now
                </Button>
                <Button onClick={() => setAsked('plan')}>Plan</Button>
              </div>
            ) : null
          }
        >
          <NetworkSentence network={network} zone={zone} />
        </Sentence>
        {network.carriesEquipment ? (
          <div className="max-w-2xl">
            <EquipmentLine crossingUntil={crossingUntil} zone={zone} />
          </div>
        ) : null}
      </div>

      <Section title="Passphrase" aside>
        <NetworkPassphrase {...{ vesselId, network, zone }} />
      </Section>
      <Section title={network.change ? 'Next change' : 'Change'} aside>
        <Changes {...{ vesselId, network, zone, calendar }} />
      </Section>
      <Section title="Who holds it" aside>
        {network.live && network.holderList.length > 0 ? (
          <p>{departed ? `${held}, ${departed}.` : `${held}.`}</p>
        ) : null}
        <Holders network={network} zone={zone} />
      </Section>
      <Section title="Leaks" aside>
        {network.leaks.length === 0 ? (
          <p className="text-soft">No card of it is lost, and no leak is reported.</p>
        ) : null}
        <Leaks {...{ vesselId, network, zone }} />
      </Section>
      <Section title="Rules" aside>
        <PolicyFacts network={network} />
        {network.may.policy ? (
          <Button className="self-start" onClick={() => setAsked('policy')}>
            Change the rules
          </Button>
        ) : null}
      </Section>
      <Section title="The network" aside>
        <NetworkFacts network={network} />
        {network.may.edit ? (
          <div className="flex flex-wrap gap-3">
            <Button onClick={() => setAsked('edit')}>Edit the network</Button>
            <Button kind="quiet" onClick={() => setAsked('remove')}>
              Remove it
            </Button>
          </div>
        ) : null}
      </Section>
      <Section title="History" aside>
        <History network={network} zone={zone} />
      </Section>

      {asked === 'change' ? (
        <ChangeNowDialog {...{ vesselId, zone, network, crossingUntil }} onClose={close} />
      ) : null}
      {asked === 'plan' ? <PlanDialog {...{ vesselId, zone, network, why }} onClose={close} /> : null}
      {asked === 'remove' ? (
        <RemoveNetworkDialog
          {...{ vesselId, network }}
          onClose={close}
          onRemoved={() => navigate(`/vessels/${vesselId}/networks`)}
        />
      ) : null}
      <Suspense fallback={<Loading>Opening the form…</Loading>}>
        {asked === 'edit' ? <NetworkForm {...{ vesselId, network }} onClose={close} /> : null}
        {asked === 'policy' ? <PolicyForm {...{ vesselId, network }} onClose={close} /> : null}
      </Suspense>
    </>
  );
}

function useWhy(network: NetworkDetail, zone: string, voyages: readonly VoyageView[]): string {
  const now = useNow();
  if (!network.change) return '';
  return reasonLine(network.change.reasons, {
    zone,
    now,
    dueAt: network.change.dueAt,
    audience: network.audience,
    quiet: network.policy.quietHours.length > 0,
    voyages,
  });
}

/** The change to come or under way, and the last one where it has drifted or is all there is. */
function Changes({ vesselId, network, zone, calendar }: NetworkProps & { calendar: readonly VoyageView[] }) {
  const rotations = useQuery(rotationsQuery(vesselId));
  const why = useWhy(network, zone, calendar);
  const last: RotationSummary | undefined =
    network.drift ??
    rotations.data?.history.find(({ networkId, state }) => networkId === network.id && state === 'live');
  return (
    <>
      {network.change ? (
        <ChangeDetail {...{ vesselId, zone, why }} rotationId={network.change.id} />
      ) : (
        <p className="text-soft">No change is planned.</p>
      )}
      {last ? (
        <div className="flex flex-col gap-2 border-t border-rule pt-4">
          <h3 className="font-medium">The one in force</h3>
          <ChangeDetail {...{ vesselId, zone }} rotationId={last.id} why="" />
        </div>
      ) : null}
    </>
  );
}
