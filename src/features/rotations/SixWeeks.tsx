import { Fragment } from 'react';
import { Link } from 'react-router-dom';
import type { VoyageKind } from '../../../shared/api/common.ts';
import type { RotationList } from '../../../shared/api/rotations.ts';
import type { VoyageView } from '../../../shared/api/voyages.ts';
import { AUDIENCES } from '../../../shared/rules/permissions.ts';
import { DateTime } from '../../components/DateTime.tsx';
import { Flag } from '../../components/Flag.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { Scale } from '../../components/Scale.tsx';
import { RowName, Table, Td, Th } from '../../components/Table.tsx';
import { useNow } from '../../lib/clock.ts';
import { cx } from '../../lib/cx.ts';
import { visibleText } from '../../lib/safeText.ts';
import { shipDateTime } from '../../lib/shipTime.ts';
import {
  changeMarks,
  DAYS,
  type Mark,
  placeMarks,
  placeOf,
  type Span,
  sixWeeks,
  voyageBars,
  weekTicks,
} from './sixWeeksLayout.ts';

interface SixWeeksProps {
  vesselId: string;
  zone: string;
  rotations: RotationList;
  voyages: readonly VoyageView[];
}

const percent = (fraction: number) => `${(fraction * 100).toFixed(3)}%`;

const STATE_WORDS: Record<Mark['state'], string> = {
  done: 'Done',
  planned: 'Planned',
  now: 'Under way now',
  late: 'Late: its time has come',
};

const BAR: Record<VoyageKind, string> = {
  charter: 'border-land-deep bg-land',
  owner_trip: 'border-land-deep bg-land',
  crossing: 'border-shallow bg-shoal',
  yard: 'border-rule bg-paper',
};

const KIND_WORDS: Record<VoyageKind, string> = {
  charter: 'Charter',
  owner_trip: "Owner's trip",
  crossing: 'Crossing',
  yard: 'Yard period',
};

/**
 * The next six weeks: voyages as bars, and one lane an audience with a mark at each change, filled when it is done.
 * On phones the same stands as a list; a table holds the same figures for screen readers.
 */
export function SixWeeks({ vesselId, zone, rotations, voyages }: SixWeeksProps) {
  const now = useNow();
  const span = sixWeeks(now, zone);
  const marks = changeMarks(rotations, span, now);
  return (
    <>
      <div className="max-md:hidden">
        <Chart {...{ vesselId, zone, voyages, marks, span, now }} />
      </div>
      <div className="md:hidden">
        <List {...{ vesselId, zone, voyages, marks, span, now }} />
      </div>
    </>
  );
}

interface DrawnProps {
  vesselId: string;
  zone: string;
  voyages: readonly VoyageView[];
  marks: readonly Mark[];
  span: Span;
  now: Date;
}

function markWords({ change, at, state }: Mark, zone: string, now: Date): string {
  return `${visibleText(change.ssid)}: ${STATE_WORDS[state].toLowerCase()}, ${shipDateTime(at, zone, now)}`;
}

function Chart({ vesselId, zone, voyages, marks, span, now }: DrawnProps) {
  const bars = voyageBars(voyages, span);
  const rows = Math.max(1, ...bars.map(({ row }) => row + 1));
  const here = placeOf(now.getTime(), span);
  return (
    <figure className="m-0">
      <figcaption className="sr-only">
        Voyages and passphrase changes of the next six weeks. The table after this has the same.
      </figcaption>
      <div className="grid grid-cols-[6.5rem_1fr] text-sm text-soft">
        <span className="content-center border-b border-rule">Voyages</span>
        <div className="relative border-b border-rule" style={{ height: `${rows * 2.25 + 0.5}rem` }}>
          {bars.map(({ voyage, left, width, row }) => (
            <span
              key={voyage.id}
              title={`${visibleText(voyage.title)}, ${shipDateTime(voyage.startsAt, zone, now)} to ${shipDateTime(voyage.endsAt, zone, now)}`}
              style={{ left: percent(left), width: percent(width), top: `${row * 2.25 + 0.25}rem` }}
              className={cx(
                'absolute h-8 truncate rounded-sm border leading-[1.9rem] text-ink',
                width > 0.035 && 'px-2',
                BAR[voyage.kind],
              )}
            >
              {width > 0.035 ? <SafeText>{voyage.title}</SafeText> : null}
            </span>
          ))}
          {bars.length === 0 ? (
            <span className="absolute inset-y-0 content-center">None on the calendar</span>
          ) : null}
        </div>
        {AUDIENCES.map((audience) => {
          const lane = placeMarks(marks.filter(({ change }) => change.audience === audience));
          const height = `${Math.max(1, ...lane.map(({ row }) => row + 1)) * 2.75}rem`;
          return (
            <Fragment key={audience}>
              <span className="flex items-center border-b border-rule" style={{ height }}>
                <Flag audience={audience} />
              </span>
              <div className="relative border-b border-rule" style={{ height }}>
                <span style={{ left: percent(here) }} className="absolute inset-y-0 w-px bg-magenta" />
                {lane.map((mark) => (
                  <Link
                    key={mark.change.id}
                    to={`/vessels/${vesselId}/networks/${mark.change.networkId}`}
                    title={markWords(mark, zone, now)}
                    aria-label={markWords(mark, zone, now)}
                    style={{ left: percent(mark.left), top: `${mark.row * 2.75 + 0.25}rem` }}
                    className="absolute grid h-9 w-8 -translate-x-1/2 place-items-center rounded-md hover:bg-land"
                  >
                    <Flare state={mark.state} />
                  </Link>
                ))}
              </div>
            </Fragment>
          );
        })}
        <span />
        <div>
          <Scale segments={DAYS} boxed className="h-2" />
          <div aria-hidden="true" className="relative h-6 text-xs">
            {weekTicks(span, zone).map(({ left, label }) => (
              <span
                key={left}
                style={{ left: percent(left) }}
                className={cx(
                  'absolute top-1 whitespace-nowrap',
                  left === 1 ? '-translate-x-full' : left > 0 && '-translate-x-1/2',
                )}
              >
                {label}
              </span>
            ))}
          </div>
        </div>
      </div>
      <div className="sr-only">
        <Table
          caption="Passphrase changes of the next six weeks"
          head={
            <>
              <Th>Network</Th>
              <Th>Ship's time</Th>
              <Th>State</Th>
            </>
          }
        >
          {marks.map((mark) => (
            <tr key={mark.change.id}>
              <RowName>{mark.change.ssid}</RowName>
              <Td>{shipDateTime(mark.at, zone, now)}</Td>
              <Td>{STATE_WORDS[mark.state]}</Td>
            </tr>
          ))}
        </Table>
        <Table
          caption="Voyages of the next six weeks"
          head={
            <>
              <Th>Voyage</Th>
              <Th>From</Th>
              <Th>Until</Th>
            </>
          }
        >
          {bars.map(({ voyage }) => (
            <tr key={voyage.id}>
              <RowName>{voyage.title}</RowName>
              <Td>{shipDateTime(voyage.startsAt, zone, now)}</Td>
              <Td>{shipDateTime(voyage.endsAt, zone, now)}</Td>
            </tr>
          ))}
        </Table>
      </div>
    </figure>
  );
}

/** A change's mark, after the flare of a light on a chart: filled when done, open when planned. */
function Flare({ state }: { state: Mark['state'] }) {
  const attention = state === 'now' || state === 'late';
  return (
    <svg viewBox="0 0 18 22" aria-hidden="true" className="h-5.5 w-4.5">
      <path
        d="M1.5 6.5C1.5 3 5 1.2 9 1.2s7.5 1.8 7.5 5.3L9 20.5z"
        strokeWidth={1.6}
        strokeLinejoin="round"
        className={cx(
          attention ? 'stroke-magenta' : 'stroke-ink',
          state === 'done' ? 'fill-ink' : 'fill-paper',
        )}
      />
    </svg>
  );
}

function List({ vesselId, zone, voyages, marks, span, now }: DrawnProps) {
  const items = [
    ...marks.map((mark) => ({ at: mark.at, key: mark.change.id, mark, voyage: null })),
    ...voyageBars(voyages, span).map(({ voyage }) => ({
      at: voyage.startsAt,
      key: voyage.id,
      mark: null,
      voyage,
    })),
  ].sort((one, other) => Date.parse(one.at) - Date.parse(other.at));
  if (items.length === 0) return <p className="text-soft">Nothing on the calendar.</p>;
  return (
    <ul className="m-0 list-none p-0">
      {items.map(({ key, mark, voyage }) => (
        <li key={key} className="border-b border-rule py-2.5">
          {mark ? (
            <Link
              to={`/vessels/${vesselId}/networks/${mark.change.networkId}`}
              className="grid min-h-11 grid-cols-[1.5rem_1fr] items-center gap-3"
            >
              <Flare state={mark.state} />
              <span>
                <span className="font-medium">
                  <SafeText>{mark.change.ssid}</SafeText>
                </span>
                <span className="block text-sm text-soft">
                  {STATE_WORDS[mark.state]}, <DateTime at={mark.at} zone={zone} />
                </span>
              </span>
            </Link>
          ) : null}
          {voyage ? (
            <div className={cx('rounded-sm border px-3 py-2', BAR[voyage.kind])}>
              <span className="font-medium">
                <SafeText>{voyage.title || KIND_WORDS[voyage.kind]}</SafeText>
              </span>
              <span className="block text-sm text-soft">
                {shipDateTime(voyage.startsAt, zone, now)} to {shipDateTime(voyage.endsAt, zone, now)}
              </span>
            </div>
          ) : null}
        </li>
      ))}
    </ul>
  );
}
