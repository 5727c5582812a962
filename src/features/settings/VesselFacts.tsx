import type { VesselSettings } from '../../../shared/api/vessels.ts';
import { ROLE_NAMES } from '../../../shared/rules/permissions.ts';
import { SafeText } from '../../components/SafeText.tsx';
import { Facts, WhoMay } from './Facts.tsx';
import { FIELD_WORDS } from './vesselDraft.ts';

const NOT_SAID = <span className="text-soft">Not entered</span>;
const text = (value: string | null) => (value ? <SafeText>{value}</SafeText> : NOT_SAID);

/** The vessel's own facts, for those who may only see them. */
export function VesselFacts({ settings }: { settings: VesselSettings }) {
  const { lengthM, guestsMax, retentionDays, serialPrefix, secondFactorRoles } = settings;
  return (
    <>
      <WhoMay>Only the captain changes these.</WhoMay>
      <Facts
        items={[
          [FIELD_WORDS.name, text(settings.name)],
          [FIELD_WORDS.kind, text(settings.kind)],
          [FIELD_WORDS.lengthM, lengthM === null ? NOT_SAID : `${lengthM} m`],
          [FIELD_WORDS.guestsMax, guestsMax ?? NOT_SAID],
          [FIELD_WORDS.homePort, text(settings.homePort)],
          [FIELD_WORDS.ownerName, text(settings.ownerName)],
          ["Guests' names", `Erased ${retentionDays} day${retentionDays === 1 ? '' : 's'} after they leave`],
          [FIELD_WORDS.serialPrefix, `${serialPrefix}, as in ${serialPrefix}-1185`],
          [
            FIELD_WORDS.secondFactorRoles,
            secondFactorRoles.length === 0
              ? 'Asked of nobody'
              : `Asked of: ${secondFactorRoles.map((role) => ROLE_NAMES[role]).join(', ')}`,
          ],
        ]}
      />
    </>
  );
}
