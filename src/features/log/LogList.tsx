import type { LogEntry } from '../../../shared/api/log.ts';
import { SafeText } from '../../components/SafeText.tsx';
import { RowName, Table, Td, Th } from '../../components/Table.tsx';
import { useNow } from '../../lib/clock.ts';
import { sameShipDay, shipClock, shipDate } from '../../lib/shipTime.ts';
import { factsInWords } from './factWords.ts';

/** Entries by the ship's day, newest first. */
export function LogList({ entries, zone }: { entries: readonly LogEntry[]; zone: string }) {
  const now = useNow();
  return (
    <Table
      caption="The log, newest first; ship's time"
      head={
        <>
          <Th>When</Th>
          <Th>What</Th>
          <Th>Whom</Th>
          <Th>Network</Th>
          <Th>By</Th>
        </>
      }
    >
      {entries.map((entry, index) => {
        const before = entries[index - 1];
        const newDay = !before || !sameShipDay(before.at, entry.at, zone);
        const facts = factsInWords(entry, zone, now);
        return (
          <tr key={entry.id}>
            <RowName className="font-normal whitespace-nowrap">
              <time dateTime={entry.at}>
                {newDay ? (
                  <span className="font-medium">{shipDate(entry.at, zone, now)} </span>
                ) : (
                  <span className="sr-only">{shipDate(entry.at, zone, now)} </span>
                )}
                {shipClock(entry.at, zone)}
              </time>
              <span className="block text-xs text-soft">no. {entry.seq}</span>
            </RowName>
            <Td>
              <span className="font-medium">{entry.words}</span>
              {facts ? (
                <span className="block text-sm text-soft">
                  <SafeText>{facts}</SafeText>
                </span>
              ) : null}
            </Td>
            <Td>
              <Subject entry={entry} />
            </Td>
            <Td>{entry.network ? <SafeText>{entry.network.ssid}</SafeText> : null}</Td>
            <Td>
              {entry.actor ? (
                <SafeText>{entry.actor.name ?? 'Name erased'}</SafeText>
              ) : (
                <span className="text-soft">Quayword</span>
              )}
            </Td>
          </tr>
        );
      })}
    </Table>
  );
}

function Subject({ entry }: { entry: LogEntry }) {
  const { subject } = entry;
  if (!subject || !['guest', 'crew', 'person'].includes(subject.kind)) return null;
  return subject.name === null ? (
    <span className="text-soft">Without a name</span>
  ) : (
    <SafeText>{subject.name}</SafeText>
  );
}
