import type { ReactNode } from 'react';
import { NavLink } from 'react-router-dom';
import { cx } from '../lib/cx.ts';
import type { Place } from './places.ts';

interface AppHeaderProps {
  title: ReactNode;
  /** The line under the title. */
  line: ReactNode;
  places: readonly Place[];
  menu: ReactNode;
}

/** Below the neatline on every page behind sign-in: whose it is, where to go, who is signed in. */
export function AppHeader({ title, line, places, menu }: AppHeaderProps) {
  return (
    <div className="grid grid-cols-[1fr_auto] items-center gap-x-4 px-4 pt-1 sm:px-8 lg:grid-cols-[1fr_auto_auto] lg:pb-2">
      <div className="min-w-0 py-1">
        <p className="truncate text-2xl font-semibold">{title}</p>
        <div className="text-sm text-soft">{line}</div>
      </div>
      <nav
        aria-label="Pages"
        className="order-3 col-span-2 -mx-4 overflow-x-auto px-4 sm:-mx-8 sm:px-8 lg:order-none lg:col-span-1 lg:mx-0 lg:px-1"
      >
        <ul className="-ml-3.5 flex w-max gap-1 py-1.5 lg:ml-0">
          {places.map(({ label, to, end }) => (
            <li key={to}>
              <NavLink
                to={to}
                end={end}
                className={({ isActive }) =>
                  cx(
                    'flex min-h-11 items-center rounded-md px-3.5 font-medium',
                    isActive ? 'bg-land text-ink' : 'text-soft hover:text-ink',
                  )
                }
              >
                {label}
              </NavLink>
            </li>
          ))}
        </ul>
      </nav>
      {menu}
    </div>
  );
}
