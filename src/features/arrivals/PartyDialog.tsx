import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { PartyForm, PartyView } from '../../../shared/api/arrivals.ts';
import { NAME_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { serverNow } from '../../lib/clock.ts';
import { fieldError } from '../../lib/errors.ts';
import { fromLocal, toLocal } from '../../lib/shipLocal.ts';
import { arrivalsKey, saveParty } from './queries.ts';

export interface PartyDraft {
  name: string;
  arrives: string;
  leaves: string;
}

const DAY_MS = 86_400_000;

/** What a new party starts with: arriving today at 15:00, leaving in a week at 10:00, ship's time. */
export function newPartyDraft(zone: string): PartyDraft {
  const now = serverNow();
  return {
    name: '',
    arrives: `${toLocal(now, zone).slice(0, 10)}T15:00`,
    leaves: `${toLocal(new Date(now.getTime() + 7 * DAY_MS), zone).slice(0, 10)}T10:00`,
  };
}

/** The draft as the server takes it, or what is wrong with its times. */
export function partyOf(
  draft: PartyDraft,
  zone: string,
): { party: PartyForm } | { errors: Partial<Record<keyof PartyDraft, string>> } {
  const arrivesAt = fromLocal(draft.arrives, zone);
  const leavesAt = fromLocal(draft.leaves, zone);
  const errors: Partial<Record<keyof PartyDraft, string>> = {};
  if (draft.name.trim() === '') errors.name = 'Give the party a name, such as the family’s';
  if (!arrivesAt) errors.arrives = 'Give the date and time of arrival';
  if (!leavesAt) errors.leaves = 'Give the date and time of departure';
  if (arrivesAt && leavesAt && leavesAt <= arrivesAt)
    errors.leaves = 'The party leaves after it arrives; choose a later time';
  if (Object.keys(errors).length > 0 || !arrivesAt || !leavesAt) return { errors };
  return { party: { name: draft.name.trim(), arrivesAt, leavesAt } };
}

interface PartyFieldsProps {
  draft: PartyDraft;
  onChange: (draft: PartyDraft) => void;
  errors: Partial<Record<keyof PartyDraft, string | undefined>>;
}

/** Name and times of a party, in ship's time. */
export function PartyFields({ draft, onChange, errors }: PartyFieldsProps) {
  return (
    <div className="grid gap-4 sm:grid-cols-2">
      <TextInput
        className="sm:col-span-2"
        label="Party"
        hint="As the crew call it, such as “Brandvold party”."
        value={draft.name}
        maxLength={NAME_MAX}
        autoComplete="off"
        onChange={(event) => onChange({ ...draft, name: event.target.value })}
        error={errors.name}
      />
      <TextInput
        type="datetime-local"
        label="Arrives, ship's time"
        value={draft.arrives}
        onChange={(event) => onChange({ ...draft, arrives: event.target.value })}
        error={errors.arrives}
      />
      <TextInput
        type="datetime-local"
        label="Leaves, ship's time"
        value={draft.leaves}
        onChange={(event) => onChange({ ...draft, leaves: event.target.value })}
        error={errors.leaves}
      />
    </div>
  );
}

interface PartyDialogProps {
  vesselId: string;
  zone: string;
  /** Null adds a party. */
  party: PartyView | null;
  onClose: () => void;
  onSaved?: (partyId: string) => void;
}

/** Adds a party or corrects one; planned changes follow its times. */
export function PartyDialog({ vesselId, zone, party, onClose, onSaved }: PartyDialogProps) {
  const client = useQueryClient();
  const [draft, setDraft] = useState<PartyDraft>(() =>
    party
      ? { name: party.name, arrives: toLocal(party.arrivesAt, zone), leaves: toLocal(party.leavesAt, zone) }
      : newPartyDraft(zone),
  );
  const [errors, setErrors] = useState<Partial<Record<keyof PartyDraft, string>>>({});
  const save = useMutation({
    mutationFn: (given: PartyForm) => saveParty(vesselId, party?.id ?? null, given),
    onSuccess: async (saved) => {
      await client.invalidateQueries({ queryKey: arrivalsKey(vesselId) });
      onSaved?.(saved.id);
      onClose();
    },
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const read = partyOf(draft, zone);
    setErrors('errors' in read ? read.errors : {});
    if ('party' in read && !save.isPending) save.mutate(read.party);
  };
  return (
    <Dialog
      open
      onClose={onClose}
      title={party ? <SafeText>{`Correct ${party.name}`}</SafeText> : 'A new party'}
      keepOpen
    >
      <form onSubmit={submit} noValidate className="flex flex-col gap-4">
        <PartyFields
          draft={draft}
          onChange={setDraft}
          errors={{
            name: errors.name ?? fieldError(save.error, 'name'),
            arrives: errors.arrives ?? fieldError(save.error, 'arrivesAt'),
            leaves: errors.leaves ?? fieldError(save.error, 'leavesAt'),
          }}
        />
        <ErrorLine error={save.error} fieldsShown />
        <Button type="submit" kind="primary" className="self-start" busy={save.isPending && 'Saving…'}>
          Save
        </Button>
      </form>
    </Dialog>
  );
}
