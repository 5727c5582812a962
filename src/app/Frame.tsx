import type { ReactNode } from 'react';
import { Outlet } from 'react-router-dom';
import { Neatline, type NeatlineMark } from '../components/Neatline.tsx';
import { useNow } from '../lib/clock.ts';
import { AppHeader } from './AppHeader.tsx';
import type { Place } from './places.ts';
import { SecondFactorNotice } from './SecondFactorNotice.tsx';

interface FrameProps {
  /** IANA name of the zone whose day runs along the top. */
  zone: string;
  marks?: readonly NeatlineMark[];
  title: ReactNode;
  line: ReactNode;
  places: readonly Place[];
  menu: ReactNode;
}

/** The neatline, the header, and the page below them. */
export function Frame({ zone, marks, title, line, places, menu }: FrameProps) {
  const now = useNow();
  return (
    <div className="flex min-h-dvh flex-col">
      <a
        href="#main"
        className="sr-only focus:not-sr-only focus:absolute focus:top-2 focus:left-2 focus:z-20 focus:bg-paper focus:px-3 focus:py-2"
      >
        Skip to the page
      </a>
      <header className="border-b border-rule">
        <Neatline zone={zone} now={now} marks={marks} />
        <AppHeader title={title} line={line} places={places} menu={menu} />
      </header>
      <SecondFactorNotice />
      <main id="main" tabIndex={-1} className="flex grow flex-col outline-none">
        <Outlet />
      </main>
    </div>
  );
}
