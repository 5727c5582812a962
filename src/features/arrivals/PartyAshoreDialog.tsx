import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import type { ArrivalsView, PartyView } from '../../../shared/api/arrivals.ts';
import type { CardView } from '../../../shared/api/cards.ts';
import { Button } from '../../components/Button.tsx';
import { Caution } from '../../components/Caution.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { RadioRow } from '../../components/inputs.tsx';
import { PageState } from '../../components/PageState.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { arrivalsKey, type CardOutcome, cardsOutQuery, partyAshore } from './queries.ts';

interface PartyAshoreDialogProps {
  vesselId: string;
  arrivals: ArrivalsView;
  party: PartyView;
  onClose: () => void;
}

const OUTCOMES = [
  { value: 'returned' as const, label: 'Returned' },
  { value: 'kept' as const, label: 'Kept by the guest' },
  { value: 'lost' as const, label: 'Missing', hint: 'Counts as a leak: whoever finds it can join.' },
];

/** The whole party leaves: what became of each card, and what that means for the network. */
export function PartyAshoreDialog({ vesselId, arrivals, party, onClose }: PartyAshoreDialogProps) {
  const client = useQueryClient();
  const out = useQuery(cardsOutQuery(vesselId));
  const [outcomes, setOutcomes] = useState<Record<string, CardOutcome['state']>>({});
  const guests = new Set(arrivals.guests.map(({ id }) => id));
  const theirs = (cards: readonly CardView[]) =>
    cards.filter(({ person }) => person && guests.has(person.id));
  const gone = useMutation({
    mutationFn: (cards: CardOutcome[]) => partyAshore(vesselId, party.id, cards),
    onSuccess: () => client.invalidateQueries({ queryKey: arrivalsKey(vesselId) }),
  });
  if (gone.data) {
    return (
      <Dialog
        open
        onClose={onClose}
        title={<SafeText>{`${party.name} is ashore`}</SafeText>}
        actions={
          <Button kind="primary" onClick={onClose}>
            Done
          </Button>
        }
      >
        {gone.data.exposed.length === 0 ? (
          <p>Nobody who left holds a password in force.</p>
        ) : (
          <ul className="m-0 flex list-none flex-col gap-2 p-0">
            {gone.data.exposed.map(({ networkId, ssid, changeAt }) => (
              <li key={networkId}>
                People who left still know the password of <SafeText>{ssid}</SafeText>.{' '}
                {changeAt ? (
                  <>
                    It changes <DateTime at={changeAt} zone={arrivals.zone} as="words" />.
                  </>
                ) : (
                  'No change is planned; plan one under Networks.'
                )}
              </li>
            ))}
          </ul>
        )}
        {gone.data.lostCards > 0 ? (
          <Caution>
            {gone.data.lostCards === 1 ? 'One card is missing.' : `${gone.data.lostCards} cards are missing.`}{' '}
            A card lost ashore is a leak. If it matters, change the network now under Networks.
          </Caution>
        ) : null}
      </Dialog>
    );
  }
  return (
    <Dialog
      open
      onClose={onClose}
      title={<SafeText>{`${party.name} goes ashore`}</SafeText>}
      size="wide"
      keepOpen
      actions={
        <Button
          kind="primary"
          size="large"
          disabled={!out.data}
          busy={gone.isPending && 'Writing it down…'}
          onClick={() =>
            gone.mutate(
              theirs(out.data?.cards ?? []).map(({ id }) => ({ cardId: id, state: outcomes[id] ?? 'kept' })),
            )
          }
        >
          Everybody is ashore
        </Button>
      }
    >
      <PageState
        query={out}
        loading="Fetching the cards they hold…"
        isEmpty={(data) => theirs(data.cards).length === 0}
        empty={<p>No card is out with this party.</p>}
      >
        {(data) => (
          <>
            <p>What became of their cards? What is left as it is counts as kept.</p>
            <ul className="m-0 list-none p-0">
              {theirs(data.cards).map((card) => (
                <li key={card.id} className="border-b border-rule py-2">
                  <RadioRow
                    label={<SafeText>{`${card.serial}, ${card.person?.name ?? ''}`}</SafeText>}
                    name={card.id}
                    value={outcomes[card.id] ?? 'kept'}
                    options={OUTCOMES}
                    onChange={(state) => setOutcomes((before) => ({ ...before, [card.id]: state }))}
                  />
                </li>
              ))}
            </ul>
          </>
        )}
      </PageState>
      <ErrorLine error={gone.error} />
    </Dialog>
  );
}
