import { cx } from '../lib/cx.ts';
import { dayFraction, sameShipDay, shipClock } from '../lib/shipTime.ts';
import { Scale } from './Scale.tsx';

export interface NeatlineMark {
  at: string;
  /** Read out ("Tamarisk Guests"). */
  label: string;
  /** Already happened: drawn in ink; what is still to come is drawn in magenta. */
  done?: boolean;
}

interface NeatlineProps {
  /** IANA name of the ship's zone. */
  zone: string;
  now: Date;
  /** Changes due; those of another ship's day are left out. */
  marks?: readonly NeatlineMark[];
}

const HOURS = [3, 6, 9, 12, 15, 18, 21];
const percent = (fraction: number) => `${(fraction * 100).toFixed(3)}%`;

function summary(clock: string, marks: readonly NeatlineMark[], zone: string): string {
  const changes = marks.map(
    (mark) => `${mark.label} ${mark.done ? 'at' : 'due at'} ${shipClock(mark.at, zone)}`,
  );
  return `Ship's time ${clock}. ${changes.length ? `Today: ${changes.join(', ')}.` : 'No change today.'}`;
}

/** Whether a mark stands so near to an hour's label that both could not be read. */
function covers(mark: NeatlineMark, hour: number, zone: string): boolean {
  return Math.abs(dayFraction(mark.at, zone) - hour / 24) < 0.012;
}

/** The ship's day along a page's top edge: 24 divisions, the hour now, and a mark at each change due today. */
export function Neatline({ zone, now, marks = [] }: NeatlineProps) {
  const at = dayFraction(now, zone);
  const clock = shipClock(now, zone);
  const today = marks.filter((mark) => sameShipDay(mark.at, now, zone));
  return (
    <div
      className="relative h-6 overflow-hidden select-none"
      role="img"
      aria-label={summary(clock, today, zone)}
    >
      <Scale segments={24} className="h-[7px]" />
      {HOURS.map((hour) => (
        <span
          key={hour}
          style={{ left: percent(hour / 24) }}
          className={cx(
            'absolute top-2 -translate-x-1/2 text-[0.6875rem] leading-4 text-soft',
            hour % 6 === 3 && 'max-sm:hidden',
            (Math.abs(hour / 24 - at - 0.02) < 0.045 || today.some((mark) => covers(mark, hour, zone))) &&
              'invisible',
          )}
        >
          {String(hour).padStart(2, '0')}
        </span>
      ))}
      {today.map((mark) => (
        <svg
          key={`${mark.at} ${mark.label}`}
          viewBox="0 0 10 8"
          aria-hidden="true"
          style={{ left: percent(dayFraction(mark.at, zone)) }}
          className={cx(
            'absolute top-[7px] h-2 w-2.5 -translate-x-1/2',
            mark.done ? 'fill-soft' : 'fill-magenta',
          )}
        >
          <path d="M0 0h10L5 8z" />
        </svg>
      ))}
      <span
        style={{ left: percent(at) }}
        className="absolute top-0 h-4.5 w-0.5 -translate-x-1/2 bg-magenta"
      />
      <span
        style={{ left: percent(at) }}
        className={cx(
          'absolute top-1.5 px-1.5 text-xs font-semibold text-magenta',
          at > 0.9 && '-translate-x-full',
        )}
      >
        {clock}
      </span>
    </div>
  );
}
