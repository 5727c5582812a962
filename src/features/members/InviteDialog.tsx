import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import { inviteBody } from '../../../shared/api/auth.ts';
import { EMAIL_MAX, NAME_MAX } from '../../../shared/rules/limits.ts';
import type { VesselRole } from '../../../shared/rules/permissions.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { fieldError, namesFields, sentenceFor } from '../../lib/errors.ts';
import { checkForm } from '../../lib/forms.ts';
import { useFocusInvalid } from '../../lib/useFocusInvalid.ts';
import { type Invite, invite, membersQuery } from './queries.ts';
import { RoleBoxes } from './RoleBoxes.tsx';

/** Invites somebody by mail. */
export function InviteDialog({ vesselId, onClose }: { vesselId: string; onClose: () => void }) {
  const client = useQueryClient();
  const { say } = useNotices();
  const [email, setEmail] = useState('');
  const [name, setName] = useState('');
  const [roles, setRoles] = useState<VesselRole[]>([]);
  const [checked, setChecked] = useState<unknown>(null);
  const send = useMutation({
    mutationFn: (given: Invite) => invite(vesselId, given),
    onSuccess: async (_made, given) => {
      await client.invalidateQueries({ queryKey: membersQuery(vesselId).queryKey });
      say(
        <>
          The invitation to <SafeText>{given.email}</SafeText> is on its way. It works once, for three days.
        </>,
      );
      onClose();
    },
  });
  const error = checked ?? send.error;
  const frame = useFocusInvalid(error);
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const given = { email, roles, ...(name.trim() === '' ? {} : { name }) };
    const result = checkForm(inviteBody, given);
    setChecked(result.ok ? null : result.error);
    if (result.ok && !send.isPending) send.mutate(given);
  };
  return (
    <Dialog open onClose={onClose} title="Invite somebody" keepOpen>
      <form ref={frame} onSubmit={submit} noValidate className="flex flex-col gap-4">
        <TextInput
          label="Mail address"
          hint="A link goes there. Whoever opens it chooses their own password."
          type="email"
          inputMode="email"
          value={email}
          maxLength={EMAIL_MAX}
          autoComplete="off"
          onChange={(event) => setEmail(event.target.value)}
          error={fieldError(error, 'email')}
        />
        <TextInput
          label="Name"
          hint="For the greeting of the mail. May be left empty."
          value={name}
          maxLength={NAME_MAX}
          autoComplete="off"
          onChange={(event) => setName(event.target.value)}
          error={fieldError(error, 'name')}
        />
        <RoleBoxes roles={roles} onChange={setRoles} error={fieldError(error, 'roles')} />
        {error && !namesFields(error) ? (
          <p role="alert" className="text-sm font-medium text-magenta">
            {sentenceFor(error)}
          </p>
        ) : null}
        <Button type="submit" kind="primary" className="self-start" busy={send.isPending && 'Sending…'}>
          Send the invitation
        </Button>
      </form>
    </Dialog>
  );
}
