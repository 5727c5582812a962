import { useMutation } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import { type MemberView, setRoles as setRolesContract } from '../../../shared/api/auth.ts';
import type { VesselRole } from '../../../shared/rules/permissions.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { Checkbox } from '../../components/inputs.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { fieldError, namesFields, sentenceFor } from '../../lib/errors.ts';
import { checkForm } from '../../lib/forms.ts';
import { RoleBoxes } from './RoleBoxes.tsx';

export interface Wanted {
  roles: readonly VesselRole[];
  suspended: boolean;
}

interface RolesDialogProps {
  member: MemberView;
  /** The person is changing their own roles. */
  isSelf: boolean;
  onSave: (wanted: Wanted) => Promise<void>;
  onClose: () => void;
}

/** One person's roles aboard, whether they are suspended, and the end of all of them. */
export function RolesDialog({ member, isSelf, onSave, onClose }: RolesDialogProps) {
  const [roles, setRoles] = useState<readonly VesselRole[]>(member.roles);
  const [suspended, setSuspended] = useState(member.suspended);
  const [checked, setChecked] = useState<unknown>(null);
  const save = useMutation({ mutationFn: onSave, onSuccess: onClose });
  const error = checked ?? save.error;
  const losesOwn = isSelf && (suspended || !roles.includes('captain'));
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const wanted = { roles: [...roles], suspended };
    const result = setRolesContract.body ? checkForm(setRolesContract.body, wanted) : null;
    setChecked(result?.ok === false ? result.error : null);
    if (result?.ok && !save.isPending) save.mutate(wanted);
  };
  return (
    <Dialog
      open
      onClose={onClose}
      title={
        <>
          Roles of <SafeText>{member.name}</SafeText>
        </>
      }
      keepOpen
    >
      <form onSubmit={submit} noValidate className="flex flex-col gap-4">
        <RoleBoxes roles={roles} onChange={setRoles} error={fieldError(error, 'roles')} />
        <Checkbox
          className="border-t border-rule pt-2"
          label={
            <>
              Suspended for now
              <span className="block text-sm text-soft">
                They keep their roles but cannot use them, and are off this vessel at once.
              </span>
            </>
          }
          checked={suspended}
          onChange={(event) => setSuspended(event.target.checked)}
        />
        {losesOwn ? (
          <p className="text-sm font-medium text-magenta">
            This is you: once saved, you can no longer change roles here.
          </p>
        ) : null}
        {roles.length === 0 ? (
          <p className="text-sm">
            With no role left, their place aboard ends at once. To bring them back, they are invited again.
          </p>
        ) : null}
        {error && !namesFields(error) ? (
          <p role="alert" className="text-sm font-medium text-magenta">
            {sentenceFor(error)}
          </p>
        ) : null}
        <div className="flex flex-wrap justify-between gap-3">
          <Button
            type="submit"
            kind="primary"
            busy={save.isPending && save.variables.roles.length > 0 && 'Saving…'}
          >
            {roles.length === 0 ? 'End all roles' : 'Save the roles'}
          </Button>
          {roles.length === 0 ? null : (
            <Button
              kind="quiet"
              onClick={() => save.mutate({ roles: [], suspended: false })}
              busy={save.isPending && save.variables.roles.length === 0 && 'Ending…'}
            >
              End all roles
            </Button>
          )}
        </div>
      </form>
    </Dialog>
  );
}
