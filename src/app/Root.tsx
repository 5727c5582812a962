import { useEffect, useRef } from 'react';
import { Outlet, ScrollRestoration, useLocation, useNavigate, useNavigation } from 'react-router-dom';
import { NoticesProvider } from '../components/Notices.tsx';
import { StepUpProvider } from '../features/auth/StepUp.tsx';
import { onSignedOut } from '../lib/api.ts';
import { rememberPlace } from '../lib/rememberedPlace.ts';
import { goAndForget, tellOtherTabs, whenOtherTabSignsOut } from '../lib/signedOut.ts';
import { ServerBanner } from './ServerBanner.tsx';

/** What stands around every page: notices, the question "is it you?", the banner, focus and scroll. */
export function Root() {
  useFocusOnNewPage();
  useLeaveWhenSignedOut();
  const slow = useNavigation().state === 'loading';
  return (
    <NoticesProvider>
      <StepUpProvider>
        <ServerBanner />
        {slow ? (
          <p
            role="status"
            className="pointer-events-none fixed top-8 left-1/2 z-20 -translate-x-1/2 animate-[arrive_150ms_400ms_backwards] rounded-md bg-fill px-3 py-1 text-sm text-on-fill"
          >
            Fetching the page…
          </p>
        ) : null}
        <Outlet />
        <ScrollRestoration />
      </StepUpProvider>
    </NoticesProvider>
  );
}

/** Puts focus at the top of the new page, so that the keyboard and screen readers start there. */
function useFocusOnNewPage(): void {
  const { pathname } = useLocation();
  const shown = useRef(pathname);
  useEffect(() => {
    if (shown.current === pathname) return;
    shown.current = pathname;
    document.getElementById('main')?.focus({ preventScroll: true });
  }, [pathname]);
}

const OPEN_PAGES = ['/sign-in', '/reset', '/invitation'];

function useLeaveWhenSignedOut(): void {
  const navigate = useNavigate();
  useEffect(() => {
    const leave = () => {
      const { pathname, search } = window.location;
      if (OPEN_PAGES.some((open) => pathname.startsWith(open))) return;
      rememberPlace(pathname + search);
      void goAndForget(() => navigate('/sign-in', { replace: true }));
    };
    onSignedOut(() => {
      tellOtherTabs();
      leave();
    });
    const stop = whenOtherTabSignsOut(leave);
    return () => {
      onSignedOut(null);
      stop();
    };
  }, [navigate]);
}
