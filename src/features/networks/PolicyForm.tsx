import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import { type NetworkView, type Policy, policyShape } from '../../../shared/api/networks.ts';
import {
  AGE_LIMIT_DAYS_MAX,
  AGE_LIMIT_DAYS_MIN,
  POLICY_BITS_MAX,
  POLICY_BITS_MIN,
  WORDS_MAX,
  WORDS_MIN,
} from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { Checkbox, TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { type ApiError, fieldError, namesFields, sentenceFor } from '../../lib/errors.ts';
import { checkForm } from '../../lib/forms.ts';
import { bitsInWords } from './policyWords.ts';
import { QuietHoursEditor } from './QuietHoursEditor.tsx';
import { changePolicy, vesselKey } from './queries.ts';

interface PolicyFormProps {
  vesselId: string;
  network: NetworkView;
  onClose: () => void;
}

/** An empty box is not zero. */
const number = (text: string): number => (text.trim() === '' ? Number.NaN : Number(text));

/** A network's rules; its plan is looked at again when they are saved. */
export function PolicyForm({ vesselId, network, onClose }: PolicyFormProps) {
  const client = useQueryClient();
  const { say } = useNotices();
  const { policy } = network;
  const [ageLimit, setAgeLimit] = useState(String(policy.ageLimitDays));
  const [bits, setBits] = useState(String(policy.leastBits));
  const [words, setWords] = useState(String(policy.words));
  const [quietHours, setQuietHours] = useState(policy.quietHours);
  const [onPartyDeparture, setOnPartyDeparture] = useState(policy.onPartyDeparture);
  const [onSignOff, setOnSignOff] = useState(policy.onSignOff);
  const [onLostCard, setOnLostCard] = useState(policy.onLostCard);
  const [onLeak, setOnLeak] = useState(policy.onLeak);
  const [wrong, setWrong] = useState<ApiError | null>(null);
  const save = useMutation({
    mutationFn: (given: Policy) => changePolicy(vesselId, network.id, given),
    onSuccess: async () => {
      await client.invalidateQueries({ queryKey: vesselKey(vesselId) });
      say('The rules are saved, and the plan was looked at again.');
      onClose();
    },
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const checked = checkForm(policyShape, {
      ageLimitDays: number(ageLimit),
      leastBits: number(bits),
      words: number(words),
      quietHours,
      onPartyDeparture,
      onSignOff,
      onLostCard,
      onLeak,
    });
    setWrong(checked.ok ? null : checked.error);
    if (checked.ok && !save.isPending) save.mutate(checked.value);
  };
  const error = wrong ?? save.error;
  const asBits = number(bits);
  const sensible = asBits >= POLICY_BITS_MIN && asBits <= POLICY_BITS_MAX;
  return (
    <Dialog
      open
      onClose={onClose}
      title={
        <>
          Rules of <SafeText>{network.ssid}</SafeText>
        </>
      }
      size="wide"
      keepOpen
    >
      <form onSubmit={submit} noValidate className="flex flex-col gap-5">
        <TextInput
          type="number"
          inputMode="numeric"
          label="Age limit, in days"
          hint={`After this a passphrase is overdue. ${AGE_LIMIT_DAYS_MIN} to ${AGE_LIMIT_DAYS_MAX}.`}
          className="max-w-72"
          value={ageLimit}
          onChange={(event) => setAgeLimit(event.target.value)}
          error={fieldError(error, 'ageLimitDays')}
        />
        <QuietHoursEditor value={quietHours} onChange={setQuietHours} error={error} />
        <fieldset>
          <legend className="text-sm font-medium">What moves a change up</legend>
          {network.audience === 'guest' ? (
            <Checkbox
              label="A party leaves"
              checked={onPartyDeparture}
              onChange={(event) => setOnPartyDeparture(event.target.checked)}
            />
          ) : null}
          <Checkbox
            label="Somebody who holds it signs off"
            checked={onSignOff}
            onChange={(event) => setOnSignOff(event.target.checked)}
          />
          <Checkbox
            label="A card is lost"
            checked={onLostCard}
            onChange={(event) => setOnLostCard(event.target.checked)}
          />
          <Checkbox
            label="A leak is reported"
            checked={onLeak}
            onChange={(event) => setOnLeak(event.target.checked)}
          />
        </fieldset>
        <div className="flex max-w-md flex-col gap-4">
          <TextInput
            type="number"
            inputMode="numeric"
            label="Words in a passphrase"
            hint={`${WORDS_MIN} to ${WORDS_MAX}. Fewer are easier to read aloud.`}
            value={words}
            onChange={(event) => setWords(event.target.value)}
            error={fieldError(error, 'words')}
          />
          <TextInput
            type="number"
            inputMode="numeric"
            label="Least strength, in bits"
            hint={
              sensible
                ? `${asBits} bits: ${bitsInWords(asBits, network.security)}.`
                : `${POLICY_BITS_MIN} to ${POLICY_BITS_MAX}.`
            }
            value={bits}
            onChange={(event) => setBits(event.target.value)}
            error={fieldError(error, 'leastBits')}
          />
        </div>
        {error && !namesFields(error) ? (
          <p role="alert" className="text-sm font-medium text-magenta">
            {sentenceFor(error)}
          </p>
        ) : null}
        <div className="flex flex-wrap justify-end gap-3">
          <Button onClick={onClose}>Cancel</Button>
          <Button type="submit" kind="primary" busy={save.isPending && 'Saving…'}>
            Save the rules
          </Button>
        </div>
      </form>
    </Dialog>
  );
}
