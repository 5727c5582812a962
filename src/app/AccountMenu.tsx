import type { ReactNode } from 'react';
import { Link } from 'react-router-dom';
import type { SessionView } from '../../shared/api/session.ts';
import { Button } from '../components/Button.tsx';
import { Disclosure } from '../components/Disclosure.tsx';
import { SafeText } from '../components/SafeText.tsx';
import { ThemeSwitch } from '../components/ThemeSwitch.tsx';
import { firstPlace, vesselPlaces } from './places.ts';
import { useSignOut } from './useSignOut.ts';

interface AccountMenuProps {
  session: SessionView;
  /** The role in which the person is here ("Purser"). */
  role: string;
  /** The vessel whose page this is, left out of the list of others. */
  vesselId?: string | undefined;
}

const ITEM = 'flex min-h-11 items-center rounded-md px-2 hover:bg-land';

/** The person's name and role; opens the way to the account, the other vessels, the colours and out. */
export function AccountMenu({ session, role, vesselId }: AccountMenuProps) {
  const signOut = useSignOut();
  return (
    <Disclosure
      className="-mr-2 shrink-0 text-right"
      button={
        <>
          <span className="block max-w-[9.5rem] truncate text-right text-sm font-semibold sm:max-w-56">
            <SafeText>{session.person.name}</SafeText>
          </span>
          <span className="block max-w-[9.5rem] truncate text-right text-sm text-soft sm:max-w-56">
            {role}
          </span>
        </>
      }
    >
      {(close) => (
        <div className="flex flex-col gap-4 text-left">
          <Places session={session} vesselId={vesselId} close={close} />
          <Link to="/account" onClick={close} className={ITEM}>
            Your account
          </Link>
          <div>
            <p className="mb-1 px-2 text-sm text-soft">Colours on this device</p>
            <ThemeSwitch />
          </div>
          <Button onClick={() => signOut.mutate()} busy={signOut.isPending && 'Signing out…'}>
            Sign out
          </Button>
        </div>
      )}
    </Disclosure>
  );
}

function Places({
  session,
  vesselId,
  close,
}: {
  session: SessionView;
  vesselId?: string | undefined;
  close: () => void;
}) {
  const others = session.memberships.filter((membership) => membership.vesselId !== vesselId);
  const items: ReactNode[] = others.map(({ vesselId: id, vesselName, roles }) => {
    const first = vesselPlaces(id, roles)[0];
    return first ? (
      <li key={id}>
        <Link to={first.to} onClick={close} className={ITEM}>
          <SafeText>{vesselName}</SafeText>
        </Link>
      </li>
    ) : null;
  });
  if (session.dealer && vesselId) {
    items.push(
      <li key="fleet">
        <Link to={firstPlace(session)} onClick={close} className={ITEM}>
          The fleet of <SafeText>{session.dealer.name}</SafeText>
        </Link>
      </li>,
    );
  }
  if (items.length === 0) return null;
  return (
    <div>
      <p className="px-2 text-sm text-soft">Go to</p>
      <ul className="max-h-64 overflow-y-auto">{items}</ul>
    </div>
  );
}
