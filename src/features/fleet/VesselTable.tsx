import { Link } from 'react-router-dom';
import type { FleetRow } from '../../../shared/api/fleet.ts';
import type { Standing } from '../../../shared/rules/fleet.ts';
import { DateTime } from '../../components/DateTime.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { RowName, Table, Td, Th } from '../../components/Table.tsx';

const STANDING_WORDS: Record<Standing, string> = {
  in_order: 'In order',
  due: 'A change is due soon',
  overdue: 'Past a limit',
  exposed: 'Exposed',
};

const hasNetworks = ({ ages }: FleetRow) => ages.owner !== null || ages.guest !== null || ages.crew !== null;

/** The vessels by name: how each stands, and when her boat was last heard. */
export function VesselTable({ rows }: { rows: readonly FleetRow[] }) {
  return (
    <Table
      caption="Vessels by name"
      className="max-w-4xl"
      head={
        <>
          <Th>Vessel</Th>
          <Th>Standing</Th>
          <Th>Boat heard, how long ago</Th>
        </>
      }
    >
      {rows.map((row) => {
        const isBad = row.standing === 'overdue' || row.standing === 'exposed';
        return (
          <tr key={row.vesselId}>
            <RowName>
              <Link
                to={`/fleet/vessels/${row.vesselId}`}
                className="-my-2.5 inline-block py-2.5 underline-offset-4 hover:underline"
              >
                <SafeText>{row.name}</SafeText>
              </Link>
            </RowName>
            <Td attention={isBad}>
              {hasNetworks(row) ? (
                STANDING_WORDS[row.standing]
              ) : (
                <span className="text-soft">No network entered yet</span>
              )}
            </Td>
            <Td attention={row.silent} className="whitespace-nowrap">
              {row.lastHeardAt ? (
                <DateTime at={row.lastHeardAt} zone={row.zone} as="age" />
              ) : (
                <span className="text-soft">Never</span>
              )}
            </Td>
          </tr>
        );
      })}
    </Table>
  );
}
