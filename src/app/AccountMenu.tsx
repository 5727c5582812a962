import { Link } from 'react-router-dom';
import type { SessionView } from '../../shared/api/session.ts';
import { Button } from '../components/Button.tsx';
import { Disclosure } from '../components/Disclosure.tsx';
import { SafeText } from '../components/SafeText.tsx';
import { ThemeSwitch } from '../components/ThemeSwitch.tsx';
import { useSignOut } from './useSignOut.ts';

interface AccountMenuProps {
  session: SessionView;
  /** The role in which the person is here ("Purser"). */
  role: string;
  /** The vessel whose page this is, if it is one's. */
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
          {session.dealer && vesselId ? (
            <Link to="/fleet" onClick={close} className={ITEM}>
              The fleet
            </Link>
          ) : null}
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
