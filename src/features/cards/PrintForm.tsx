import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { PrintBody } from '../../../shared/api/cards.ts';
import type { CardFormat, CardLanguage } from '../../../shared/api/common.ts';
import type { NetworkView } from '../../../shared/api/networks.ts';
import { CARD_LANGUAGES, CARD_MESSAGES } from '../../../shared/messages/card.ts';
import { may, printAction, type VesselRole } from '../../../shared/rules/permissions.ts';
import { Button } from '../../components/Button.tsx';
import { Caution } from '../../components/Caution.tsx';
import { Checkbox, RadioRow, Select, TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { CARD_FORMATS, printCards } from '../../lib/cardPrinting.ts';
import { fieldError, namesFields, sentenceFor } from '../../lib/errors.ts';
import { crewToPrintQuery, partyToPrintQuery } from './queries.ts';

interface PrintFormProps {
  vesselId: string;
  roles: readonly VesselRole[];
  networks: readonly NetworkView[];
}

interface Recipient {
  id: string;
  name: string;
}

/** For which network, for whom, in which format: then the PDF. */
export function PrintForm({ vesselId, roles, networks }: PrintFormProps) {
  const client = useQueryClient();
  const { say } = useNotices();
  const mine = networks.filter(({ audience }) => may(roles, printAction(audience)));
  const [networkId, setNetworkId] = useState(
    (mine.find(({ audience }) => audience === 'guest') ?? mine[0])?.id ?? '',
  );
  const [whom, setWhom] = useState<'people' | 'blanks'>('people');
  const [left, setLeft] = useState<ReadonlySet<string>>(new Set());
  const [blanks, setBlanks] = useState('10');
  const [format, setFormat] = useState<CardFormat>('wallet-sheet');
  const [language, setLanguage] = useState<CardLanguage | ''>('');
  const [which, setWhich] = useState<'' | 'live' | 'staged'>('');
  const [keepEarlier, setKeepEarlier] = useState(false);
  const network = mine.find(({ id }) => id === networkId) ?? null;
  const forCrew = network?.audience === 'crew';
  const party = useQuery({ ...partyToPrintQuery(vesselId), enabled: network !== null && !forCrew });
  const crew = useQuery({
    ...crewToPrintQuery(vesselId),
    enabled: network !== null && forCrew && may(roles, 'crew.view'),
  });
  const people: Recipient[] = forCrew
    ? (crew.data?.aboard ?? []).map(({ id, name }) => ({ id, name }))
    : (party.data?.guests ?? [])
        .filter(({ ashoreAt }) => ashoreAt === null)
        .map(({ id, name, label }) => ({ id, name: name ?? label }));
  const chosen = people.filter(({ id }) => !left.has(id)).map(({ id }) => id);
  const count = whom === 'blanks' ? Number(blanks) || 0 : chosen.length;
  const print = useMutation({
    mutationFn: (body: PrintBody) => printCards(vesselId, networkId, body),
    onSuccess: async () => {
      await client.invalidateQueries({ queryKey: ['vessels', vesselId, 'cards'] });
      await client.invalidateQueries({ queryKey: ['vessels', vesselId, 'arrivals'] });
      say('The cards are a PDF among your downloads. Print it at actual size.');
    },
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (print.isPending || !network) return;
    print.mutate({
      ...(whom === 'blanks'
        ? { blanks: Number(blanks) }
        : forCrew
          ? { crewMemberIds: chosen }
          : { guestIds: chosen }),
      format,
      ...(language ? { language } : {}),
      ...(which ? { which } : {}),
      keepEarlier,
    });
  };
  if (!network) return <p className="text-soft">There is no network you may print cards for yet.</p>;
  const staged = network.change && network.change.stagedAt !== null ? network.change : null;
  return (
    <form
      onSubmit={submit}
      noValidate
      className="grid grid-cols-[minmax(0,1fr)] gap-x-10 gap-y-5 lg:grid-cols-2"
    >
      <div className="flex flex-col gap-5">
        <Select
          label="Network"
          value={networkId}
          onChange={(event) => {
            setNetworkId(event.target.value);
            setLeft(new Set());
          }}
          options={mine.map(({ id, ssid }) => ({ value: id, label: ssid }))}
        />
        {network.cautions.length > 0 ? <Caution>{network.cautions.join(' ')}</Caution> : null}
        {!network.live && !staged ? (
          <Caution>No passphrase is on record for this network, so there is nothing to print yet.</Caution>
        ) : null}
        {staged ? (
          <Select
            label="Which passphrase"
            value={which}
            onChange={(event) => setWhich(event.target.value as typeof which)}
            options={[
              { value: '', label: 'The right one for each person’s dates' },
              { value: 'staged', label: 'The new one, from the change on' },
              ...(network.live ? [{ value: 'live', label: 'The one in force now' }] : []),
            ]}
          />
        ) : null}
        <RadioRow
          label="For whom"
          name="whom"
          value={whom}
          onChange={setWhom}
          options={[
            {
              value: 'people' as const,
              label: forCrew
                ? 'Crew aboard'
                : party.data?.party
                  ? party.data.party.name
                  : 'The party aboard or next',
            },
            {
              value: 'blanks' as const,
              label: 'Nobody yet',
              hint: 'Each card is written to a person when it is handed over.',
            },
          ]}
        />
        {whom === 'blanks' ? (
          <TextInput
            label="How many"
            inputMode="numeric"
            value={blanks}
            onChange={(event) => setBlanks(event.target.value.replace(/\D/g, ''))}
            error={fieldError(print.error, 'blanks')}
          />
        ) : people.length === 0 ? (
          <p className="text-soft">
            {forCrew ? 'Nobody is on the crew list yet.' : 'Nobody is on a party’s list yet.'}
          </p>
        ) : (
          <fieldset className="grid min-w-0 grid-cols-1 sm:grid-cols-2">
            <legend className="text-sm font-medium">
              {chosen.length} of {people.length}
            </legend>
            {people.map(({ id, name }) => (
              <Checkbox
                key={id}
                label={<SafeText>{name}</SafeText>}
                checked={!left.has(id)}
                onChange={(event) =>
                  setLeft((before) => {
                    const after = new Set(before);
                    if (event.target.checked) after.delete(id);
                    else after.add(id);
                    return after;
                  })
                }
              />
            ))}
          </fieldset>
        )}
      </div>
      <div className="flex flex-col gap-5">
        <RadioRow label="Format" name="format" value={format} options={CARD_FORMATS} onChange={setFormat} />
        <Select
          label="Language"
          value={language}
          onChange={(event) => setLanguage(event.target.value as CardLanguage | '')}
          options={[
            { value: '', label: whom === 'blanks' ? 'English' : 'Each person’s own' },
            ...CARD_LANGUAGES.map((value) => ({ value, label: CARD_MESSAGES[value].languageName })),
          ]}
        />
        {whom === 'people' ? (
          <Checkbox
            label="Earlier cards of these people stay good"
            hint="Otherwise they become void, which is right when a card was spoilt."
            checked={keepEarlier}
            onChange={(event) => setKeepEarlier(event.target.checked)}
          />
        ) : null}
        {print.error && !(namesFields(print.error) && fieldError(print.error, 'blanks')) ? (
          <p role="alert" className="text-sm font-medium text-magenta">
            {sentenceFor(print.error)}
          </p>
        ) : null}
        <Button
          type="submit"
          kind="primary"
          size="large"
          className="self-start"
          disabled={count === 0 || (!network.live && !staged)}
          busy={print.isPending && 'Printing…'}
        >
          {count === 1 ? 'Print 1 card' : `Print ${count} cards`}
        </Button>
      </div>
    </form>
  );
}
