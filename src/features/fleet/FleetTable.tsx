import { Link } from 'react-router-dom';
import type { FleetAge, FleetNextChange, FleetRow } from '../../../shared/api/fleet.ts';
import type { FleetSort } from '../../../shared/rules/fleet.ts';
import { AUDIENCE_NAMES } from '../../../shared/rules/permissions.ts';
import { DateTime } from '../../components/DateTime.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { RowName, Table, Td, Th } from '../../components/Table.tsx';

interface FleetTableProps {
  rows: readonly FleetRow[];
  sort: FleetSort;
  onSort: (sort: FleetSort) => void;
}

/** The fleet, one row a vessel, worst first unless sorted otherwise. */
export function FleetTable({ rows, sort, onSort }: FleetTableProps) {
  const heading = (wanted: FleetSort, words: string, numeric = false) => (
    <Th
      numeric={numeric}
      onSort={() => onSort(sort === wanted ? 'worst' : wanted)}
      sorted={sort === wanted ? (wanted === 'name' ? 'ascending' : 'descending') : undefined}
    >
      {words}
    </Th>
  );
  return (
    <Table
      caption="Ages of passphrases by vessel. Headings sort; pressing one again puts the worst first."
      head={
        <>
          {heading('name', 'Vessel')}
          {heading('owner', 'Owner, days', true)}
          {heading('guest', 'Guest, days', true)}
          {heading('crew', 'Crew, days', true)}
          {heading('weakest', 'Weakest passphrase')}
          {heading('departed', 'Left, still holding')}
          <Th>Next change</Th>
          {heading('heard', 'Boat last heard')}
        </>
      }
    >
      {rows.map((row) => (
        <tr key={row.vesselId}>
          <RowName className="whitespace-nowrap">
            <Link
              to={`/fleet/vessels/${row.vesselId}`}
              className="-my-2.5 inline-block py-2.5 underline-offset-4 hover:underline"
            >
              <SafeText>{row.name}</SafeText>
            </Link>
          </RowName>
          <AgeCell age={row.ages.owner} />
          <AgeCell age={row.ages.guest} />
          <AgeCell age={row.ages.crew} />
          <Td>{row.weakest?.words ?? 'Not known'}</Td>
          <Td attention={row.departedHolding > 0}>{people(row.departedHolding)}</Td>
          <Td>
            <NextChange next={row.nextChange} zone={row.zone} />
          </Td>
          <Td attention={row.silent} className="whitespace-nowrap">
            {row.lastHeardAt ? <DateTime at={row.lastHeardAt} zone={row.zone} as="age" /> : 'Never'}
          </Td>
        </tr>
      ))}
    </Table>
  );
}

function AgeCell({ age }: { age: FleetAge | null }) {
  if (!age) return <Td numeric>–</Td>;
  return (
    <Td numeric attention={age.pastLimit} title={`Limit ${age.limitDays} days`}>
      {age.days ?? 'not known'}
    </Td>
  );
}

const people = (count: number) => (count === 0 ? 'None' : count === 1 ? '1 person' : `${count} people`);

/** When a vessel's or network's next change is, in ship's time, or why there is none. */
export function NextChange({ next, zone }: { next: FleetNextChange; zone: string }) {
  const who = next.audience ? `${AUDIENCE_NAMES[next.audience]}, ` : '';
  if (next.kind === 'due' && next.dueAt) {
    return (
      <>
        {who}
        <DateTime at={next.dueAt} zone={zone} />
      </>
    );
  }
  return (
    <>
      {who}
      {next.words}
    </>
  );
}
