import { Link } from 'react-router-dom';
import { AccountMenu } from './AccountMenu.tsx';
import { Frame } from './Frame.tsx';
import { FLEET_PLACES, firstPlace, vesselPlaces } from './places.ts';
import { roleLine } from './roleLine.ts';
import { useSession } from './session.ts';

const DEVICE_ZONE = Intl.DateTimeFormat().resolvedOptions().timeZone;

/** The frame of the account page: the navigation is that of the person's first place. */
export function AccountShell() {
  const session = useSession();
  const first = session.memberships[0];
  const places = session.dealer ? FLEET_PLACES : first ? vesselPlaces(first.vesselId, first.roles) : [];
  const home = firstPlace(session);
  return (
    <Frame
      zone={DEVICE_ZONE}
      title="Your account"
      line={
        home === '/account' ? (
          'No vessel has given you a role at present.'
        ) : (
          <Link to={home} className="text-deep underline underline-offset-4">
            Back to {session.dealer ? 'the fleet' : 'the vessel'}
          </Link>
        )
      }
      places={places}
      menu={<AccountMenu session={session} role={roleLine(session)} />}
    />
  );
}
