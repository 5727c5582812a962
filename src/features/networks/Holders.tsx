import type { NetworkDetail } from '../../../shared/api/networks.ts';
import { DateTime } from '../../components/DateTime.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { RowName, Table, Td, Th } from '../../components/Table.tsx';
import { LEFT } from './words.ts';

const KIND: Record<NetworkDetail['holderList'][number]['kind'], string> = {
  guest: 'A guest',
  crew: 'A crew member',
  person: 'Somebody with an account',
};

const THROUGH: Record<string, string> = {
  card: 'a card',
  screen: 'a screen',
  reveal: 'shown here',
  own_page: 'their own page',
  entry_sheet: 'the entry sheet',
  typed: 'typed it in',
  notice: 'a notice',
};

/** Who holds the passphrase in force, those who have left first. */
export function Holders({ network, zone }: { network: NetworkDetail; zone: string }) {
  const { holderList, audience } = network;
  if (holderList.length === 0) {
    return (
      <p className="text-soft">
        Nobody is on record as holding it. Handing out a card, showing a code or reading it here writes it
        down.
      </p>
    );
  }
  const unnamed = holderList.some(({ name }) => name === null);
  return (
    <>
      <Table
        caption="Who holds the passphrase in force"
        head={
          <>
            <Th>Who</Th>
            <Th>Since</Th>
            <Th>Through</Th>
            <Th>Now</Th>
          </>
        }
      >
        {holderList.map((holder, index) => (
          // biome-ignore lint/suspicious/noArrayIndexKey: holders come without identifiers, in the server's order
          <tr key={index}>
            <RowName>
              {holder.name === null ? (
                <span className="font-normal text-soft">{KIND[holder.kind]}</span>
              ) : (
                <SafeText>{holder.name}</SafeText>
              )}
            </RowName>
            <Td>
              <DateTime at={holder.since} zone={zone} />
            </Td>
            <Td>{THROUGH[holder.through] ?? holder.through}</Td>
            <Td attention={holder.departedAt !== null}>
              {holder.departedAt ? (
                <>
                  {LEFT[audience]} <DateTime at={holder.departedAt} zone={zone} as="date" />
                </>
              ) : (
                'current'
              )}
            </Td>
          </tr>
        ))}
      </Table>
      {unnamed ? (
        <p className="text-sm text-soft">Names are shown to those who look after the people concerned.</p>
      ) : null}
    </>
  );
}
