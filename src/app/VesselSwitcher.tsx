import { Link } from 'react-router-dom';
import type { SessionView } from '../../shared/api/session.ts';
import { Disclosure } from '../components/Disclosure.tsx';
import { SafeText } from '../components/SafeText.tsx';
import { vesselPlaces } from './places.ts';

/** The way to the person's other vessels, beside the name of this one; nothing when there is no other. */
export function VesselSwitcher({ session, vesselId }: { session: SessionView; vesselId: string }) {
  const others = session.memberships.filter((membership) => membership.vesselId !== vesselId);
  if (others.length === 0) return null;
  return (
    <Disclosure
      align="left"
      className="ml-1 inline-block"
      button={<span className="text-deep underline underline-offset-4">Other vessels</span>}
    >
      {(close) => (
        <ul className="max-h-72 overflow-y-auto text-base text-ink">
          {others.map(({ vesselId: id, vesselName, roles }) => (
            <li key={id}>
              <Link
                to={vesselPlaces(id, roles)[0]?.to ?? '/account'}
                onClick={close}
                className="flex min-h-11 items-center rounded-md px-2 hover:bg-land"
              >
                <SafeText>{vesselName}</SafeText>
              </Link>
            </li>
          ))}
        </ul>
      )}
    </Disclosure>
  );
}
