import type { ArrivalsView } from '../../../shared/api/arrivals.ts';
import type { Language } from '../../../shared/api/common.ts';
import { BOX } from '../../components/Field.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { Table, Td, Th } from '../../components/Table.tsx';
import { useNow } from '../../lib/clock.ts';
import { LANGUAGE_CHOICES } from '../../lib/languages.ts';
import { shipDateTime } from '../../lib/shipTime.ts';
import type { PreviewRow } from './listRows.ts';

interface PreviewTableProps {
  rows: readonly PreviewRow[];
  cabins: ArrivalsView['cabins'];
  zone: string;
  /** Sentences of the server about a row, by its place. */
  errorOf: (index: number) => string | undefined;
  onChange: (index: number, row: PreviewRow) => void;
  onDrop: (index: number) => void;
}

/** What would be added, to be corrected in place before anything is stored. */
export function PreviewTable({ rows, cabins, zone, errorOf, onChange, onDrop }: PreviewTableProps) {
  const now = useNow();
  const stay = (row: PreviewRow) =>
    [
      row.fromAt ? `from ${shipDateTime(row.fromAt, zone, now)}` : '',
      row.untilAt ? `until ${shipDateTime(row.untilAt, zone, now)}` : '',
    ]
      .filter(Boolean)
      .join(', ');
  return (
    <Table
      caption="Guests that would be added"
      head={
        <>
          <Th>Line</Th>
          <Th>Name</Th>
          <Th>Cabin</Th>
          <Th>Language</Th>
          <Th>Under 16</Th>
          <Th>Aboard</Th>
          <Th>
            <span className="sr-only">Leave out</span>
          </Th>
        </>
      }
    >
      {rows.map((row, index) => (
        <tr key={row.line}>
          <Td className="align-middle text-soft">{row.line}</Td>
          <Td className="min-w-48">
            <input
              className={BOX}
              aria-label={`Name, line ${row.line}`}
              value={row.name ?? ''}
              placeholder="Without a name"
              autoComplete="off"
              onChange={(event) =>
                onChange(index, { ...row, name: event.target.value === '' ? null : event.target.value })
              }
            />
            {errorOf(index) ? (
              <span role="alert" className="mt-1 block text-sm font-medium text-magenta">
                {errorOf(index)}
              </span>
            ) : null}
            {row.notes.map((note) => (
              <span key={note} className="mt-1 block text-sm text-soft">
                <SafeText>{note}</SafeText>
              </span>
            ))}
          </Td>
          <Td className="min-w-44">
            <select
              className={BOX}
              aria-label={`Cabin, line ${row.line}`}
              value={row.cabinId ?? ''}
              onChange={(event) => onChange(index, { ...row, cabinId: event.target.value || null })}
            >
              <option value="">No cabin yet</option>
              {cabins.map(({ id, name, deck }) => (
                <option key={id} value={id}>
                  {name}, {deck}
                </option>
              ))}
            </select>
          </Td>
          <Td className="min-w-36">
            <select
              className={BOX}
              aria-label={`Language, line ${row.line}`}
              value={row.language}
              onChange={(event) => onChange(index, { ...row, language: event.target.value as Language })}
            >
              {LANGUAGE_CHOICES.map(({ value, label }) => (
                <option key={value} value={value}>
                  {label}
                </option>
              ))}
            </select>
          </Td>
          <Td>
            <label className="grid size-11 place-items-center">
              <input
                type="checkbox"
                className="size-5 accent-ink"
                aria-label={`Under 16, line ${row.line}`}
                checked={row.under16}
                onChange={(event) => onChange(index, { ...row, under16: event.target.checked })}
              />
            </label>
          </Td>
          <Td className="align-middle text-sm text-soft">{stay(row) || "the party's times"}</Td>
          <Td>
            <button
              type="button"
              className="min-h-11 px-2 text-sm underline underline-offset-4"
              aria-label={`Leave out line ${row.line}`}
              onClick={() => onDrop(index)}
            >
              Leave out
            </button>
          </Td>
        </tr>
      ))}
    </Table>
  );
}
