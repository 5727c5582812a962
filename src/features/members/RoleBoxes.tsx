import { useId } from 'react';
import { ROLE_NAMES, VESSEL_ROLES, type VesselRole } from '../../../shared/rules/permissions.ts';
import { FieldError } from '../../components/Field.tsx';
import { Checkbox } from '../../components/inputs.tsx';

const HINTS: Record<VesselRole, string> = {
  captain: 'Everything of the vessel, and who may do what.',
  chief_stew: 'Guests, crew list, and changes of the guest and crew networks.',
  purser: 'Guests, arrivals, cards and the log.',
  eto: "Networks and access points, without guests' names.",
  crew: "Their own page with the crew network's code, and nothing else.",
  owner_keeper: "Beside another role: may see and hand out the owner network's passphrase.",
};

interface RoleBoxesProps {
  roles: readonly VesselRole[];
  onChange: (roles: VesselRole[]) => void;
  error: string | undefined;
}

/** The roles aboard, several of which one person may have. */
export function RoleBoxes({ roles, onChange, error }: RoleBoxesProps) {
  const id = useId();
  return (
    <fieldset aria-describedby={error ? id : undefined}>
      <legend className="text-sm font-medium">Roles aboard, one or more</legend>
      {VESSEL_ROLES.map((role) => (
        <Checkbox
          key={role}
          label={
            <>
              {ROLE_NAMES[role]}
              <span className="block text-sm text-soft">{HINTS[role]}</span>
            </>
          }
          checked={roles.includes(role)}
          onChange={(event) =>
            onChange(
              VESSEL_ROLES.filter((one) => (one === role ? event.target.checked : roles.includes(one))),
            )
          }
        />
      ))}
      {error ? <FieldError id={id}>{error}</FieldError> : null}
    </fieldset>
  );
}
