import type { Browser, Page } from 'playwright-core';
import type { Services } from '../../server/services.ts';
import { openWindow, signIn } from '../support/browser.ts';

/** A page of the product as one person sees it. */
export interface PlaceToLook {
  readonly name: string;
  /** Role of the demo's person, or null for nobody signed in. */
  readonly role: string | null;
  readonly path: string;
}

interface Ids {
  vessel: string;
  network: string;
  rotation: string | null;
  solveig: string;
}

/** Every route of the client, with ids of the demo fleet filled in. */
export async function placesToLook(services: Services): Promise<PlaceToLook[]> {
  const ids = await services.db.transaction({ kind: 'system' }, (tx) =>
    services.db.row<Ids>(
      tx,
      `SELECT v.id AS vessel, n.id AS network, s.id AS solveig,
         (SELECT r.id FROM rotations r JOIN networks c ON c.id = r.network_id AND c.audience = 'crew'
          WHERE r.vessel_id = v.id AND r.state IN ('staged','handed_out','applying','needs_somebody') LIMIT 1) AS rotation
       FROM vessels v JOIN networks n ON n.vessel_id = v.id AND n.audience = 'crew', vessels s
       WHERE v.name = 'Tamarisk' AND s.name = 'Solveig Maren'`,
    ),
  );
  if (!ids) throw new Error('The demo fleet is not laid');
  const aboard = `/vessels/${ids.vessel}`;
  return [
    { name: 'sign-in', role: null, path: '/sign-in' },
    { name: 'reset', role: null, path: '/reset' },
    { name: 'reset-new', role: null, path: '/reset/new#not-a-token-that-works-at-all' },
    { name: 'invitation', role: null, path: '/invitation#not-a-token-that-works-at-all' },
    { name: 'not-found', role: null, path: '/nowhere' },
    { name: 'account', role: 'Purser', path: '/account' },
    { name: 'arrivals', role: 'Purser', path: `${aboard}/arrivals` },
    { name: 'arrivals-import', role: 'Purser', path: `${aboard}/arrivals/import` },
    { name: 'networks', role: 'Chief stew', path: `${aboard}/networks` },
    { name: 'network', role: 'Captain', path: `${aboard}/networks/${ids.network}` },
    { name: 'crew', role: 'Chief stew', path: `${aboard}/crew` },
    { name: 'crew-own', role: 'Crew member', path: `${aboard}/crew` },
    { name: 'cards', role: 'Purser', path: `${aboard}/cards` },
    { name: 'log', role: 'Purser', path: `${aboard}/log` },
    { name: 'settings', role: 'Captain', path: `${aboard}/settings` },
    ...(ids.rotation ? [{ name: 'entry', role: 'ETO', path: `${aboard}/entry/${ids.rotation}` }] : []),
    { name: 'fleet', role: 'Dealer, service desk', path: '/fleet' },
    { name: 'fleet-vessels', role: 'Dealer, service desk', path: '/fleet/vessels' },
    { name: 'fleet-vessel', role: 'Dealer, service desk', path: `/fleet/vessels/${ids.solveig}` },
  ];
}

/** Opens a place and waits until what it fetches is there. */
export async function lookAt(page: Page, path: string): Promise<void> {
  await page.goto(path);
  await page.waitForLoadState('networkidle');
  await page.evaluate(() => document.fonts.ready);
}

/** Whether the page as a whole scrolls sideways. */
export const scrollsSideways = (page: Page): Promise<boolean> =>
  page.evaluate(() => document.documentElement.scrollWidth > window.innerWidth);

/** Puts a change of the crew network on its way, so that there is an entry sheet to look at. */
export async function startCrewChange(
  browser: Browser,
  origin: string,
  stew: { email: string; password: string },
): Promise<void> {
  const { page, context } = await openWindow(browser, origin, {
    viewport: { width: 1280, height: 900 },
  });
  await signIn(page, stew);
  const answer = await page.evaluate(async () => {
    const session = await (await fetch('/api/session')).json();
    const { vesselId } = session.memberships[0];
    const { networks } = await (await fetch(`/api/vessels/${vesselId}/networks`)).json();
    const crew = networks.find((network: { audience: string }) => network.audience === 'crew');
    const done = await fetch(`/api/vessels/${vesselId}/networks/${crew.id}/rotations/now`, {
      method: 'POST',
      headers: {
        'Content-Type': 'application/json',
        'X-Quayword-CSRF': session.csrf,
        'Idempotency-Key': crypto.randomUUID(),
      },
      body: JSON.stringify({ reason: 'routine' }),
    });
    return done.status;
  });
  if (answer !== 201) throw new Error(`The change could not be started (${answer})`);
  await context.close();
}
