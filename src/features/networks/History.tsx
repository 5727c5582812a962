import type { NetworkDetail } from '../../../shared/api/networks.ts';
import { DateTime } from '../../components/DateTime.tsx';
import { RowName, Table, Td, Th } from '../../components/Table.tsx';
import { GRADE_WORDS } from './words.ts';

type Past = NetworkDetail['history'][number];

function stateOf({ liveAt, retiredAt, state }: Past): string {
  if (liveAt && !retiredAt) return state === 'drifted' ? 'In force, not the same everywhere' : 'In force';
  if (liveAt) return 'Retired';
  if (state === 'cancelled' || state === 'superseded' || retiredAt) return 'Never used';
  return state === 'staged' ? 'Ready' : 'Being changed to';
}

/** The network's passphrases, newest first, without the passphrases themselves. */
export function History({ network, zone }: { network: NetworkDetail; zone: string }) {
  if (network.history.length === 0) return <p className="text-soft">No passphrase has been on record yet.</p>;
  return (
    <Table
      caption="Passphrases of this network, newest first"
      head={
        <>
          <Th>Number</Th>
          <Th>Made by</Th>
          <Th>Strength</Th>
          <Th>In force from</Th>
          <Th>Until</Th>
          <Th>State</Th>
        </>
      }
    >
      {network.history.map((past) => (
        <tr key={past.generation}>
          <RowName>{past.generation}</RowName>
          <Td>{past.origin === 'generated' ? 'Quayword' : 'somebody, typed in'}</Td>
          <Td attention={past.grade === 'weak' && past.liveAt !== null && past.retiredAt === null}>
            {GRADE_WORDS[past.grade]}
          </Td>
          <Td>{past.liveAt ? <DateTime at={past.liveAt} zone={zone} /> : ''}</Td>
          <Td>{past.liveAt && past.retiredAt ? <DateTime at={past.retiredAt} zone={zone} /> : ''}</Td>
          <Td>{stateOf(past)}</Td>
        </tr>
      ))}
    </Table>
  );
}
