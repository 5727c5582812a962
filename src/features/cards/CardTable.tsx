import { useMutation, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import type { CardView } from '../../../shared/api/cards.ts';
import { Button } from '../../components/Button.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { Flag } from '../../components/Flag.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { RowName, Table, Td, Th } from '../../components/Table.tsx';
import { serverNow } from '../../lib/clock.ts';
import { sentenceFor } from '../../lib/errors.ts';
import { shipMomentInWords } from '../../lib/shipTime.ts';
import { loseCard, returnCard, voidCard } from './queries.ts';

const STATES: Record<CardView['state'], string> = {
  printed: 'Printed',
  handed_over: 'Handed over',
  returned: 'Returned',
  lost: 'Lost',
  void: 'Void',
};
const CARRIES: Record<CardView['carries'], string> = {
  live: '',
  staged: 'of the next passphrase',
  retired: 'of a passphrase no longer in force',
};

/** Cards with their life so far, and what can happen to each next. */
export function CardTable({
  vesselId,
  zone,
  cards,
}: {
  vesselId: string;
  zone: string;
  cards: readonly CardView[];
}) {
  const client = useQueryClient();
  const { say } = useNotices();
  const [losing, setLosing] = useState<CardView | null>(null);
  const refresh = () => client.invalidateQueries({ queryKey: ['vessels', vesselId] });
  const onError = (error: unknown) => say(sentenceFor(error));
  const returned = useMutation({
    mutationFn: (card: CardView) => returnCard(vesselId, card.id),
    onSuccess: async (card) => {
      await refresh();
      say(`${card.serial} is back.`);
    },
    onError,
  });
  const spoilt = useMutation({
    mutationFn: (card: CardView) => voidCard(vesselId, card.id),
    onSuccess: async (card) => {
      await refresh();
      say(`${card.serial} is void.`);
    },
    onError,
  });
  const lost = useMutation({
    mutationFn: (card: CardView) => loseCard(vesselId, card.id),
    onSuccess: async ({ card, changeAt }) => {
      setLosing(null);
      await refresh();
      say(
        <SafeText>
          {changeAt
            ? `${card.serial} is lost. ${card.network} changes ${shipMomentInWords(changeAt, zone, serverNow())}.`
            : `${card.serial} is lost. Its passphrase is not in force, so nothing has to change.`}
        </SafeText>,
      );
    },
    onError,
  });
  return (
    <>
      <Table
        caption="Join cards, newest first"
        head={
          <>
            <Th>Serial</Th>
            <Th>Network</Th>
            <Th>For</Th>
            <Th>State</Th>
            <Th>Printed</Th>
            <Th>
              <span className="sr-only">What can be done</span>
            </Th>
          </>
        }
      >
        {cards.map((card) => (
          <tr key={card.id}>
            <RowName className="whitespace-nowrap">{card.serial}</RowName>
            <Td>
              <span className="inline-flex items-center gap-2">
                <Flag audience={card.audience} word={false} /> <SafeText>{card.network}</SafeText>
              </span>
            </Td>
            <Td>
              {card.person ? (
                <SafeText>{card.person.name}</SafeText>
              ) : (
                <span className="text-soft">Nobody yet</span>
              )}
            </Td>
            <Td attention={card.state === 'lost' && card.carries === 'live'}>
              {STATES[card.state]}{' '}
              <span className="text-sm font-normal text-soft">{CARRIES[card.carries]}</span>
            </Td>
            <Td className="whitespace-nowrap">
              <DateTime at={card.printedAt} zone={zone} as="moment" />
            </Td>
            <Td className="py-0 text-right whitespace-nowrap">
              {card.state === 'handed_over' ? (
                <>
                  <Button kind="quiet" onClick={() => returned.mutate(card)}>
                    Returned
                  </Button>
                  <Button kind="quiet" onClick={() => setLosing(card)}>
                    Lost
                  </Button>
                </>
              ) : null}
              {card.state === 'printed' ? (
                <>
                  <Button kind="quiet" onClick={() => spoilt.mutate(card)}>
                    Make void
                  </Button>
                  <Button kind="quiet" onClick={() => setLosing(card)}>
                    Lost
                  </Button>
                </>
              ) : null}
            </Td>
          </tr>
        ))}
      </Table>
      <Dialog
        open={losing !== null}
        onClose={() => setLosing(null)}
        title={`Card ${losing?.serial ?? ''} is lost`}
        actions={
          <>
            <Button onClick={() => setLosing(null)}>Not now</Button>
            <Button
              kind="attention"
              busy={lost.isPending && 'Writing it down…'}
              onClick={() => losing && lost.mutate(losing)}
            >
              It is lost
            </Button>
          </>
        }
      >
        <p>
          A card lost ashore is a leak: whoever finds it can join.{' '}
          {losing?.carries === 'live'
            ? 'The network counts as exposed, and its change moves up.'
            : 'Its passphrase is not in force now.'}
        </p>
      </Dialog>
    </>
  );
}
