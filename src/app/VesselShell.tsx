import { useQuery } from '@tanstack/react-query';
import { type LoaderFunctionArgs, useParams } from 'react-router-dom';
import { SafeText } from '../components/SafeText.tsx';
import { vesselQuery } from '../features/vessels/queries.ts';
import { useNow } from '../lib/clock.ts';
import { queryClient } from '../lib/queryClient.ts';
import { zoneOffset } from '../lib/shipTime.ts';
import { AccountMenu } from './AccountMenu.tsx';
import { FirstLoad } from './FirstLoad.tsx';
import { Frame } from './Frame.tsx';
import { vesselPlaces } from './places.ts';
import { NotFound } from './RouteError.tsx';
import { shownRoles } from './roleLine.ts';
import { useSession } from './session.ts';
import { VesselSwitcher } from './VesselSwitcher.tsx';

/** Waits for the vessel's head: its zone is what every time on the page below is said in. */
export const vesselLoader = ({ params }: LoaderFunctionArgs) =>
  queryClient.ensureQueryData(vesselQuery(params.vesselId ?? ''));

/** The frame of a vessel's pages. */
export function VesselShell() {
  const { vesselId = '' } = useParams();
  const session = useSession();
  const { data: vessel } = useQuery(vesselQuery(vesselId));
  const now = useNow();
  const membership = session.memberships.find((one) => one.vesselId === vesselId);
  if (!membership) return <NotFound />;
  if (!vessel) return <FirstLoad />;
  return (
    <Frame
      zone={vessel.zone}
      marks={vessel.changesToday.map(({ at, network, done }) => ({ at, label: network, done }))}
      title={<SafeText>{vessel.name}</SafeText>}
      line={
        <>
          {vessel.lying ? (
            <>
              Lying <SafeText>{vessel.lying}</SafeText> ·{' '}
            </>
          ) : null}
          ship's time {zoneOffset(vessel.zone, now)}
          <VesselSwitcher session={session} vesselId={vesselId} />
        </>
      }
      places={vesselPlaces(vesselId, membership.roles)}
      menu={<AccountMenu session={session} role={shownRoles(membership.roles)} vesselId={vesselId} />}
    />
  );
}
