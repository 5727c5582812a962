import type { RouteObject } from 'react-router-dom';
import { FirstLoad } from './FirstLoad.tsx';
import { Root } from './Root.tsx';
import { NotFound, RouteError } from './RouteError.tsx';
import { firstPlaceLoader, sessionLoader, vesselFirstPlaceLoader } from './session.ts';

const vesselPages: RouteObject[] = [
  { index: true, loader: vesselFirstPlaceLoader, Component: FirstLoad },
  {
    path: 'arrivals',
    lazy: async () => {
      const { ArrivalsPage, arrivalsLoader } = await import('../pages/ArrivalsPage.tsx');
      return { Component: ArrivalsPage, loader: arrivalsLoader };
    },
  },
  {
    path: 'arrivals/import',
    lazy: async () => {
      const { ImportPage, importLoader } = await import('../pages/ImportPage.tsx');
      return { Component: ImportPage, loader: importLoader };
    },
  },
  {
    path: 'crew',
    lazy: async () => {
      const { CrewPage, crewLoader } = await import('../pages/CrewPage.tsx');
      return { Component: CrewPage, loader: crewLoader };
    },
  },
  {
    path: 'cards',
    lazy: async () => {
      const { CardsPage, cardsLoader } = await import('../pages/CardsPage.tsx');
      return { Component: CardsPage, loader: cardsLoader };
    },
  },
  {
    path: 'log',
    lazy: async () => {
      const { LogPage, logLoader } = await import('../pages/LogPage.tsx');
      return { Component: LogPage, loader: logLoader };
    },
  },
];

const fleetPages: RouteObject[] = [
  {
    index: true,
    lazy: async () => {
      const { FleetPage, fleetLoader } = await import('../pages/FleetPage.tsx');
      return { Component: FleetPage, loader: fleetLoader };
    },
  },
  {
    path: 'vessels/:vesselId',
    lazy: async () => {
      const { FleetVesselPage, fleetVesselLoader } = await import('../pages/FleetVesselPage.tsx');
      return { Component: FleetVesselPage, loader: fleetVesselLoader };
    },
  },
];

/** Every address of the client, and nothing else: the only place that knows all pages. */
export const routes: RouteObject[] = [
  {
    Component: Root,
    ErrorBoundary: RouteError,
    HydrateFallback: FirstLoad,
    children: [
      {
        path: 'sign-in',
        lazy: async () => ({ Component: (await import('../pages/SignInPage.tsx')).SignInPage }),
      },
      {
        path: 'reset',
        lazy: async () => ({ Component: (await import('../pages/ResetRequestPage.tsx')).ResetRequestPage }),
      },
      {
        path: 'reset/new',
        lazy: async () => ({ Component: (await import('../pages/ResetPage.tsx')).ResetPage }),
      },
      {
        path: 'invitation',
        lazy: async () => ({ Component: (await import('../pages/InvitationPage.tsx')).InvitationPage }),
      },
      {
        loader: sessionLoader,
        ErrorBoundary: RouteError,
        children: [
          { index: true, loader: firstPlaceLoader, Component: FirstLoad },
          {
            path: 'account',
            lazy: async () => ({ Component: (await import('./AccountShell.tsx')).AccountShell }),
            children: [
              {
                index: true,
                lazy: async () => {
                  const { AccountPage, accountLoader } = await import('../pages/AccountPage.tsx');
                  return { Component: AccountPage, loader: accountLoader };
                },
              },
            ],
          },
          {
            path: 'vessels/:vesselId',
            lazy: async () => {
              const { VesselShell, vesselLoader } = await import('./VesselShell.tsx');
              return { Component: VesselShell, loader: vesselLoader };
            },
            children: vesselPages,
          },
          {
            path: 'fleet',
            lazy: async () => ({ Component: (await import('./DealerShell.tsx')).DealerShell }),
            children: fleetPages,
          },
        ],
      },
      { path: '*', Component: NotFound },
    ],
  },
];
