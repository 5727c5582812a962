import { useQuery } from '@tanstack/react-query';
import { Link, type LoaderFunctionArgs, useParams } from 'react-router-dom';
import type { FleetVesselView } from '../../shared/api/fleet.ts';
import { SECURITY_NAMES } from '../../shared/rules/wifi.ts';
import { AgeScale } from '../components/AgeScale.tsx';
import { DateTime } from '../components/DateTime.tsx';
import { Flag } from '../components/Flag.tsx';
import { Page, Section } from '../components/Page.tsx';
import { Empty, PageState } from '../components/PageState.tsx';
import { SafeText } from '../components/SafeText.tsx';
import { Attention, Sentence } from '../components/Sentence.tsx';
import { RowName, Table, Td, Th } from '../components/Table.tsx';
import { NextChange } from '../features/fleet/FleetTable.tsx';
import { fleetVesselQuery } from '../features/fleet/queries.ts';
import { startLoad } from '../lib/queryClient.ts';
import { useTitle } from '../lib/useTitle.ts';

export function fleetVesselLoader({ params }: LoaderFunctionArgs) {
  startLoad(fleetVesselQuery(params.vesselId ?? ''));
  return null;
}

/** `/fleet/vessels/:vesselId` */
export function FleetVesselPage() {
  const { vesselId = '' } = useParams();
  const query = useQuery(fleetVesselQuery(vesselId));
  useTitle(query.data?.name ?? 'Vessel');
  return (
    <Page>
      <Link to="/fleet" className="self-start py-2 text-deep underline-offset-4 hover:underline">
        Back to the fleet
      </Link>
      <PageState query={query} loading="Fetching the vessel…" failed="This vessel could not be fetched.">
        {(vessel) => <VesselAudit vessel={vessel} />}
      </PageState>
    </Page>
  );
}

const STANDING_SENTENCE: Record<FleetVesselView['standing'], string> = {
  in_order: 'Every network is in order.',
  due: 'A change is due soon.',
  overdue: 'A network is past its limit.',
  exposed: 'People who should not know it may hold a live passphrase.',
};

function VesselAudit({ vessel }: { vessel: FleetVesselView }) {
  const worst = vessel.standing === 'overdue' || vessel.standing === 'exposed';
  const facts = [
    vessel.kind,
    vessel.lengthM ? `${vessel.lengthM} m` : '',
    vessel.lying ? `lying ${vessel.lying}` : '',
  ];
  return (
    <>
      <div className="flex flex-col gap-1">
        <Sentence>
          <SafeText>{vessel.name}</SafeText>.{' '}
          {vessel.networks.length === 0 ? (
            'No network has been entered yet.'
          ) : worst ? (
            <Attention>{STANDING_SENTENCE[vessel.standing]}</Attention>
          ) : (
            STANDING_SENTENCE[vessel.standing]
          )}
        </Sentence>
        <p className="text-sm text-soft">
          <SafeText>{facts.filter(Boolean).join(', ')}</SafeText>. Boat last heard{' '}
          {vessel.lastHeardAt ? (
            <>
              <DateTime at={vessel.lastHeardAt} zone={vessel.zone} as="age" /> ago
            </>
          ) : (
            'never'
          )}
          . Times are ship's time.
        </p>
      </div>
      <Section title="Networks">
        {vessel.networks.length === 0 ? <Empty title="Her captain or ETO enters the networks." /> : null}
        <ul className="m-0 list-none p-0">
          {vessel.networks.map((network) => (
            <li
              key={network.networkId}
              className="grid items-center gap-x-8 gap-y-2 border-b border-rule py-4 lg:grid-cols-[16rem_1fr_20rem]"
            >
              <div className="flex items-center gap-4">
                <Flag audience={network.audience} size="large" word={false} />
                <div>
                  <p className="text-lg font-medium">
                    <SafeText>{network.ssid}</SafeText>
                  </p>
                  <p className="text-sm text-soft">
                    {network.audience}, {SECURITY_NAMES[network.security]}
                    {network.carriesEquipment ? ", carries ship's equipment" : ''}
                  </p>
                </div>
              </div>
              {network.ageDays === null ? (
                <p className="text-soft">No passphrase is on record, so its age cannot be told.</p>
              ) : (
                <AgeScale days={network.ageDays} limitDays={network.limitDays} />
              )}
              <div className="text-sm">
                <p className="font-medium">
                  <NextChange next={{ ...network.nextChange, audience: null }} zone={vessel.zone} />
                </p>
                <p>{network.guess ?? 'Strength not known'}</p>
                <p>
                  {network.holders === 1 ? '1 person holds' : `${network.holders} people hold`} it
                  {network.departedHolders > 0 ? (
                    <>
                      ,{' '}
                      <Attention>
                        {network.departedHolders} {network.departedHolders === 1 ? 'has' : 'have'} left
                      </Attention>
                    </>
                  ) : null}
                  {network.openLeaks > 0 ? (
                    <>
                      , <Attention>{network.openLeaks} reported leaked or lost</Attention>
                    </>
                  ) : null}
                </p>
              </div>
            </li>
          ))}
        </ul>
      </Section>
      <Section title="Changes">
        {vessel.history.length === 0 ? (
          <Empty title="No change is on record yet." />
        ) : (
          <Table
            caption={<SafeText>{`Changes on ${vessel.name}, newest first`}</SafeText>}
            head={
              <>
                <Th>Network</Th>
                <Th>Due</Th>
                <Th>In force</Th>
                <Th>Timing</Th>
                <Th>State</Th>
              </>
            }
          >
            {vessel.history.map((change) => (
              <tr key={change.id}>
                <RowName>
                  <Flag audience={change.audience} />
                </RowName>
                <Td>
                  <DateTime at={change.dueAt} zone={vessel.zone} />
                </Td>
                <Td>{change.liveAt ? <DateTime at={change.liveAt} zone={vessel.zone} /> : '–'}</Td>
                <Td attention={change.timing === 'late'}>
                  {change.timing === 'late' ? 'Late' : change.timing === 'on_time' ? 'On time' : '–'}
                </Td>
                <Td>
                  {change.words}
                  {change.urgent ? ', urgent' : ''}
                </Td>
              </tr>
            ))}
          </Table>
        )}
      </Section>
    </>
  );
}
