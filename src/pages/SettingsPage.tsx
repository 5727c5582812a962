import { useQuery } from '@tanstack/react-query';
import type { ReactNode } from 'react';
import { type LoaderFunctionArgs, useParams } from 'react-router-dom';
import type { VesselSettings } from '../../shared/api/vessels.ts';
import { may, type VesselRole } from '../../shared/rules/permissions.ts';
import { Page, Section } from '../components/Page.tsx';
import { PageState } from '../components/PageState.tsx';
import { SafeText } from '../components/SafeText.tsx';
import { Attention, Sentence } from '../components/Sentence.tsx';
import { sessionQuery } from '../features/auth/queries.ts';
import { People } from '../features/members/People.tsx';
import { membersQuery } from '../features/members/queries.ts';
import { AccessPoints } from '../features/settings/AccessPoints.tsx';
import { Cabins } from '../features/settings/Cabins.tsx';
import { LyingForm } from '../features/settings/LyingForm.tsx';
import { PermissionTable } from '../features/settings/PermissionTable.tsx';
import { settingsQuery } from '../features/settings/queries.ts';
import { ShipZones } from '../features/settings/ShipZones.tsx';
import { VesselFacts } from '../features/settings/VesselFacts.tsx';
import { VesselForm } from '../features/settings/VesselForm.tsx';
import { vesselQuery } from '../features/vessels/queries.ts';
import { queryClient, startLoad } from '../lib/queryClient.ts';
import { useTitle } from '../lib/useTitle.ts';

const rolesOn = (
  session: { memberships: { vesselId: string; roles: VesselRole[] }[] } | undefined,
  id: string,
) => session?.memberships.find((one) => one.vesselId === id)?.roles ?? [];

export async function settingsLoader({ params }: LoaderFunctionArgs) {
  const vesselId = params.vesselId ?? '';
  startLoad(settingsQuery(vesselId));
  const session = await queryClient.ensureQueryData(sessionQuery);
  if (may(rolesOn(session, vesselId), 'members.view')) startLoad(membersQuery(vesselId));
  return null;
}

/** `/vessels/:vesselId/settings` */
export function SettingsPage() {
  const { vesselId = '' } = useParams();
  const { data: session } = useQuery(sessionQuery);
  const { data: head } = useQuery(vesselQuery(vesselId));
  const query = useQuery(settingsQuery(vesselId));
  const roles = rolesOn(session, vesselId);
  const mayEdit = may(roles, 'vessel.edit');
  const mayEditNetworks = may(roles, 'networks.edit');
  useTitle('Settings', head?.name);
  return (
    <Page className="max-w-6xl gap-8">
      <PageState query={query} loading="Fetching the settings…" failed="The settings could not be fetched.">
        {(settings) => (
          <>
            <div className="flex flex-col gap-3">
              <Sentence>
                <SettingsSentence settings={settings} roles={roles} />
              </Sentence>
              <OnThisPage />
            </div>
            <Part id="vessel">
              {mayEdit ? (
                <VesselForm key={vesselId} settings={settings} />
              ) : (
                <VesselFacts settings={settings} />
              )}
            </Part>
            <Part id="lying">
              <LyingForm key={vesselId} settings={settings} />
            </Part>
            <Part id="time">
              <ShipZones settings={settings} mayEdit={mayEdit} />
            </Part>
            <Part id="cabins">
              <Cabins key={vesselId} settings={settings} mayEdit={mayEdit} />
            </Part>
            <Part id="access-points">
              <AccessPoints key={vesselId} settings={settings} mayEdit={mayEditNetworks} />
            </Part>
            <Part id="people">
              {may(roles, 'members.view') && session ? (
                <People
                  vesselId={vesselId}
                  zone={head?.zone ?? 'UTC'}
                  personId={session.person.id}
                  mayManage={may(roles, 'members.manage')}
                />
              ) : (
                <p className="text-soft">The captain and the chief stew see who has which role.</p>
              )}
            </Part>
            <Part id="may">
              <PermissionTable own={roles} />
            </Part>
          </>
        )}
      </PageState>
    </Page>
  );
}

const PARTS = {
  vessel: 'The vessel',
  lying: 'Where she lies',
  time: "Ship's time",
  cabins: 'Cabins',
  'access-points': 'Access points',
  people: 'People and roles',
  may: 'Who may do what',
} as const;

function Part({ id, children }: { id: keyof typeof PARTS; children: ReactNode }) {
  return (
    <div id={id} className="scroll-mt-4">
      <Section aside title={PARTS[id]}>
        {children}
      </Section>
    </div>
  );
}

function OnThisPage() {
  return (
    <nav aria-label="On this page">
      <ul className="m-0 flex list-none flex-wrap gap-x-5 p-0">
        {Object.entries(PARTS).map(([id, title]) => (
          <li key={id}>
            <a
              href={`#${id}`}
              className="inline-flex min-h-11 items-center text-deep underline underline-offset-4"
            >
              {title}
            </a>
          </li>
        ))}
      </ul>
    </nav>
  );
}

const counted = (count: number, one: string, many: string) =>
  count === 0 ? `no ${many}` : `${count} ${count === 1 ? one : many}`;

function SettingsSentence({ settings, roles }: { settings: VesselSettings; roles: readonly VesselRole[] }) {
  const { name, cabins, accessPoints } = settings;
  const yours = may(roles, 'vessel.edit')
    ? 'Below you change them, and who is aboard with which role.'
    : may(roles, 'networks.edit')
      ? "The access points and where she lies are yours to change, the rest is the captain's."
      : "Where she lies is yours to change, the rest is the captain's.";
  if (accessPoints.length === 0) {
    return (
      <>
        <SafeText>{name}</SafeText> has {counted(cabins.length, 'cabin', 'cabins')}.{' '}
        <Attention>List her access points first: without them no passphrase can be changed.</Attention>
      </>
    );
  }
  return (
    <>
      <SafeText>{name}</SafeText> has {counted(cabins.length, 'cabin', 'cabins')} and{' '}
      {counted(accessPoints.length, 'access point', 'access points')}. {yours}
    </>
  );
}
