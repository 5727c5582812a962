import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import { type VesselBody, type VesselSettings, vesselBody } from '../../../shared/api/vessels.ts';
import { NAME_MAX } from '../../../shared/rules/limits.ts';
import { ROLE_NAMES, VESSEL_ROLES, type VesselRole } from '../../../shared/rules/permissions.ts';
import { Button } from '../../components/Button.tsx';
import { Caution } from '../../components/Caution.tsx';
import { FieldError } from '../../components/Field.tsx';
import { Checkbox, TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { ApiError, fieldError, namesFields, sentenceFor } from '../../lib/errors.ts';
import { checkForm } from '../../lib/forms.ts';
import { useFocusInvalid } from '../../lib/useFocusInvalid.ts';
import { saveVessel, settingsQuery } from './queries.ts';
import { bodyOf, differing, draftOf, FIELD_WORDS, follow, type VesselDraft } from './vesselDraft.ts';

interface Held {
  /** The settings the draft was typed over. */
  over: VesselSettings;
  draft: VesselDraft;
  /** Typed here and meanwhile changed by somebody else. */
  both: readonly (keyof VesselDraft)[];
}

/** The vessel's own facts, for those who may change them. What is typed outlives anybody else's change. */
export function VesselForm({ settings }: { settings: VesselSettings }) {
  const client = useQueryClient();
  const { say } = useNotices();
  const [held, setHeld] = useState<Held>(() => ({ over: settings, draft: draftOf(settings), both: [] }));
  const [checked, setChecked] = useState<unknown>(null);
  const fresh = () => client.invalidateQueries({ queryKey: settingsQuery(settings.id).queryKey });
  const save = useMutation({
    mutationFn: (body: VesselBody) => saveVessel(settings.id, body),
    onSuccess: (saved) => {
      setHeld({ over: saved, draft: draftOf(saved), both: [] });
      say('Saved.');
    },
    onError: (error) => {
      if (error instanceof ApiError && error.code === 'conflict') void fresh();
    },
  });
  if (settings.updatedAt !== held.over.updatedAt && !save.isPending) {
    const { draft, both } = follow(held.draft, draftOf(held.over), draftOf(settings));
    setHeld({ over: settings, draft, both });
  }
  const { draft } = held;
  const error = checked ?? save.error;
  const form = useFocusInvalid(error);
  const isConflict = error instanceof ApiError && error.code === 'conflict';
  const set = (changes: Partial<VesselDraft>) =>
    setHeld((before) => ({ ...before, draft: { ...before.draft, ...changes } }));
  const box = (key: Exclude<keyof VesselDraft, 'secondFactorRoles'>) => ({
    label: FIELD_WORDS[key],
    value: draft[key],
    onChange: (event: { target: { value: string } }) => set({ [key]: event.target.value }),
    error: fieldError(error, key),
    autoComplete: 'off',
  });
  const toggle = (role: VesselRole, on: boolean) =>
    set({
      secondFactorRoles: VESSEL_ROLES.filter((one) =>
        one === role ? on : draft.secondFactorRoles.includes(one),
      ),
    });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const body = bodyOf(draft, settings);
    const result = checkForm(vesselBody, body);
    setChecked(result.ok ? null : result.error);
    if (result.ok && !save.isPending) save.mutate(body);
  };
  const isChanged = differing(draft, draftOf(settings)).length > 0;
  return (
    <form ref={form} onSubmit={submit} noValidate className="grid max-w-2xl gap-x-6 gap-y-5 sm:grid-cols-2">
      <TextInput {...box('name')} maxLength={NAME_MAX} className="sm:col-span-2" />
      <TextInput {...box('kind')} maxLength={60} hint="Motor yacht, sailing yacht, …" />
      <TextInput {...box('homePort')} maxLength={NAME_MAX} hint="May be left empty." />
      <TextInput {...box('lengthM')} inputMode="decimal" maxLength={8} hint="In metres." />
      <TextInput {...box('guestsMax')} inputMode="numeric" maxLength={4} hint="How many she takes at most." />
      <TextInput
        {...box('ownerName')}
        maxLength={NAME_MAX}
        className="sm:col-span-2"
        hint="May be left empty. Passphrases made of it are then recognised as weak, as those made of her name and home port are. It is shown on this page only."
      />
      <TextInput
        {...box('retentionDays')}
        inputMode="numeric"
        maxLength={4}
        hint="After a party has left; then the names are erased."
      />
      <TextInput
        {...box('serialPrefix')}
        maxLength={3}
        autoCapitalize="characters"
        hint={`As in ${draft.serialPrefix.toUpperCase() || 'T'}-1185. Cards already printed keep theirs.`}
      />
      <fieldset className="sm:col-span-2">
        <legend className="text-sm font-medium">Who must sign in with a second factor</legend>
        <p className="text-sm text-soft">
          A code from an app on their phone. Those who have none yet set one up before they can go on aboard.
        </p>
        <div className="grid sm:grid-cols-2">
          {VESSEL_ROLES.map((role) => (
            <Checkbox
              key={role}
              label={ROLE_NAMES[role]}
              checked={draft.secondFactorRoles.includes(role)}
              onChange={(event) => toggle(role, event.target.checked)}
            />
          ))}
        </div>
        {fieldError(error, 'secondFactorRoles') ? (
          <FieldError>{fieldError(error, 'secondFactorRoles')}</FieldError>
        ) : null}
      </fieldset>
      <div className="flex flex-col items-start gap-4 sm:col-span-2">
        {isConflict && save.variables?.updatedAt === settings.updatedAt ? (
          <Caution announce action={<Button onClick={() => void fresh()}>Reload the settings</Button>}>
            Somebody changed these settings while you were editing. Reload them: nothing you typed is lost.
          </Caution>
        ) : isConflict || held.both.length > 0 ? (
          <Caution announce>
            Somebody changed these settings while you were editing. The newest ones are here now and nothing
            you typed is lost: look it over, then save again.
            {held.both.map((key) => (
              <span key={key} className="block">
                {FIELD_WORDS[key]}: yours stands
                {key === 'secondFactorRoles' || draftOf(settings)[key] === '' ? null : (
                  <>
                    {' '}
                    in place of their “<SafeText>{draftOf(settings)[key]}</SafeText>”
                  </>
                )}
                .
              </span>
            ))}
          </Caution>
        ) : null}
        {error && !isConflict && !namesFields(error) ? (
          <p role="alert" className="text-sm font-medium text-magenta">
            {sentenceFor(error)}
          </p>
        ) : null}
        <div className="flex flex-wrap gap-3">
          <Button type="submit" kind={isChanged ? 'primary' : 'secondary'} busy={save.isPending && 'Saving…'}>
            Save the vessel
          </Button>
          {isChanged ? (
            <Button
              kind="quiet"
              onClick={() => {
                setHeld({ over: settings, draft: draftOf(settings), both: [] });
                setChecked(null);
                save.reset();
              }}
            >
              Put back what was there
            </Button>
          ) : null}
        </div>
      </div>
    </form>
  );
}
