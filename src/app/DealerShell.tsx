import { ROLE_NAMES } from '../../shared/rules/permissions.ts';
import { SafeText } from '../components/SafeText.tsx';
import { AccountMenu } from './AccountMenu.tsx';
import { Frame } from './Frame.tsx';
import { FLEET_PLACES } from './places.ts';
import { NotFound } from './RouteError.tsx';
import { useSession } from './session.ts';

const OFFICE_ZONE = Intl.DateTimeFormat().resolvedOptions().timeZone;

/** The frame of the dealer's pages. The day along the top is the office's, by this device's zone. */
export function DealerShell() {
  const session = useSession();
  if (!session.dealer) return <NotFound />;
  return (
    <Frame
      zone={OFFICE_ZONE}
      title={<SafeText>{session.dealer.name}</SafeText>}
      line="Office time above; each vessel's own times are in ship's time."
      places={FLEET_PLACES}
      menu={<AccountMenu session={session} role={ROLE_NAMES[session.dealer.role]} />}
    />
  );
}
