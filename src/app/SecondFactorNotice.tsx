import { Link, useLocation } from 'react-router-dom';
import { Caution } from '../components/Caution.tsx';
import { useSession } from './session.ts';

/** Leads to the account page while a role asks for a second factor that is not set up. */
export function SecondFactorNotice() {
  const { secondFactor } = useSession();
  const { pathname } = useLocation();
  if (!secondFactor.required || secondFactor.enrolled || pathname === '/account') return null;
  return (
    <aside aria-label="Second factor">
      <Caution className="sm:px-7">
        Your role asks for a second factor. Until it is set up, some pages stay closed to you.{' '}
        <Link to="/account" className="font-medium text-deep underline underline-offset-4">
          Set it up now
        </Link>
      </Caution>
    </aside>
  );
}
