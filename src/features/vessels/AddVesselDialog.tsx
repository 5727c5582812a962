import { useMutation } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import { type NewVesselBody, newVesselBody } from '../../../shared/api/vessels.ts';
import { EMAIL_MAX, NAME_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { ZonePicker } from '../../components/ZonePicker.tsx';
import { fieldError } from '../../lib/errors.ts';
import { checkForm } from '../../lib/forms.ts';
import { useFocusInvalid } from '../../lib/useFocusInvalid.ts';
import { addVessel, type NewVessel } from './queries.ts';

interface AddVesselDialogProps {
  onClose: () => void;
  onAdded: (vessel: NewVessel) => void;
}

/** A dealer takes a vessel into the fleet; her captain is invited by mail and fills in the rest. */
export function AddVesselDialog({ onClose, onAdded }: AddVesselDialogProps) {
  const [form, setForm] = useState({
    name: '',
    kind: 'Motor yacht',
    homePort: '',
    zone: '',
    captain: '',
    email: '',
  });
  const [checked, setChecked] = useState<unknown>(null);
  const add = useMutation({ mutationFn: addVessel, onSuccess: onAdded });
  const error = checked ?? add.error;
  const frame = useFocusInvalid(error);
  const box = (key: keyof typeof form, path: string = key) => ({
    value: form[key],
    autoComplete: 'off',
    onChange: (event: { target: { value: string } }) =>
      setForm((before) => ({ ...before, [key]: event.target.value })),
    error: fieldError(error, path),
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const { captain, email, ...rest } = form;
    const body: NewVesselBody = { ...rest, captain: { name: captain, email } };
    const result = checkForm(newVesselBody, body);
    setChecked(result.ok ? null : result.error);
    if (result.ok && !add.isPending) add.mutate(body);
  };
  return (
    <Dialog open onClose={onClose} title="Add a vessel" keepOpen>
      <form ref={frame} onSubmit={submit} noValidate className="grid gap-4 sm:grid-cols-2">
        <TextInput {...box('name')} label="Her name" maxLength={NAME_MAX} className="sm:col-span-2" />
        <TextInput {...box('kind')} label="Kind" maxLength={60} hint="Motor yacht, sailing yacht, …" />
        <TextInput {...box('homePort')} label="Home port" maxLength={NAME_MAX} hint="May be left empty." />
        <ZonePicker
          className="sm:col-span-2"
          label="Ship's time"
          hint="The zone her clocks are set to now. Her captain can change it."
          value={form.zone}
          onChange={(zone) => setForm((before) => ({ ...before, zone }))}
          error={fieldError(error, 'zone')}
        />
        <TextInput
          {...box('captain', 'captain.name')}
          label="Captain's name"
          maxLength={NAME_MAX}
          className="sm:col-span-2"
        />
        <TextInput
          {...box('email', 'captain.email')}
          label="Captain's mail address"
          hint="An invitation goes there. It works once, for three days; until it is accepted nobody has a role aboard."
          type="email"
          inputMode="email"
          maxLength={EMAIL_MAX}
          className="sm:col-span-2"
        />
        <ErrorLine error={error} fieldsShown className="sm:col-span-2" />
        <Button
          type="submit"
          kind="primary"
          className="justify-self-start sm:col-span-2"
          busy={add.isPending && 'Adding…'}
        >
          Add her and invite the captain
        </Button>
      </form>
    </Dialog>
  );
}
