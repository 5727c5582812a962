import { type RouteObject, replace } from 'react-router-dom';
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
    path: 'networks',
    lazy: async () => {
      const { NetworksPage, networksLoader } = await import('../pages/NetworksPage.tsx');
      return { Component: NetworksPage, loader: networksLoader };
    },
  },
  {
    path: 'networks/:networkId',
    lazy: async () => {
      const { NetworkPage, networkLoader } = await import('../pages/NetworkPage.tsx');
      return { Component: NetworkPage, loader: networkLoader };
    },
  },
  {
    path: 'entry/:rotationId',
    lazy: async () => {
      const { EntrySheetPage, entrySheetLoader } = await import('../pages/EntrySheetPage.tsx');
      return { Component: EntrySheetPage, loader: entrySheetLoader };
    },
  },
  // Where the mail about a change leads.
  {
    path: 'changes/:rotationId',
    loader: ({ params }) => replace(`/vessels/${params.vesselId}/entry/${params.rotationId}`),
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
  {
    path: 'settings',
    lazy: async () => {
      const { SettingsPage, settingsLoader } = await import('../pages/SettingsPage.tsx');
      return { Component: SettingsPage, loader: settingsLoader };
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
    path: 'vessels',
    lazy: async () => {
      const { FleetVesselsPage, fleetVesselsLoader } = await import('../pages/FleetVesselsPage.tsx');
      return { Component: FleetVesselsPage, loader: fleetVesselsLoader };
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
