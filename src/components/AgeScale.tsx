import { cx } from '../lib/cx.ts';
import { ageLabel, ageScaleTicks } from './ageScaleTicks.ts';
import { Scale } from './Scale.tsx';

interface AgeScaleProps {
  /** Age in days; a fraction below a day is said in hours. */
  days: number;
  /** Age limit in days. */
  limitDays: number;
  className?: string;
}

const percent = (fraction: number) => `${(fraction * 100).toFixed(3)}%`;

/** Keeps a label whose middle is at `fraction` inside its scale. */
function shift(fraction: number): string {
  if (fraction < 0.1) return 'translate-x-0';
  return fraction > 0.9 ? '-translate-x-full' : '-translate-x-1/2';
}

/**
 * How old something is against its limit, on a graduated rule. The axis ends at the limit, or runs past it when the
 * age has: what lies beyond is drawn in magenta.
 */
export function AgeScale({ days, limitDays, className }: AgeScaleProps) {
  const end = Math.max(limitDays, days * 1.06);
  const age = days / end;
  const limit = limitDays / end;
  const over = days > limitDays;
  const words = `${ageLabel(days)} old, limit ${limitDays} day${limitDays === 1 ? '' : 's'}`;
  const ticks = ageScaleTicks(limitDays).filter((day) => Math.abs(day / end - limit) > 0.12);
  return (
    <div
      className={cx('relative h-20', className)}
      role="img"
      aria-label={over ? `${words}, past it` : words}
    >
      <span
        style={{ left: percent(age) }}
        className={cx('absolute top-0 whitespace-nowrap text-sm font-semibold text-magenta', shift(age))}
      >
        {ageLabel(days)}
      </span>
      <span style={{ width: percent(Math.min(age, limit)) }} className="absolute top-6 h-5 bg-shallow" />
      {over ? (
        <span
          style={{ left: percent(limit), width: percent(age - limit) }}
          className="absolute top-6 h-5 bg-wash"
        />
      ) : null}
      <Scale segments={14} boxed className="absolute top-[1.9rem] h-2" />
      {over ? <span style={{ left: percent(limit) }} className="absolute top-5 h-7 w-0.5 bg-ink" /> : null}
      <span style={{ left: percent(age) }} className="absolute top-5 h-7 w-0.5 -translate-x-1/2 bg-magenta" />
      {ticks.map((day) => (
        <span
          key={day}
          style={{ left: percent(day / end) }}
          className="absolute top-12 -translate-x-1/2 text-[0.6875rem] text-soft"
        >
          {day}
        </span>
      ))}
      <span
        style={{ left: percent(limit) }}
        className={cx(
          'absolute top-12 text-[0.6875rem] leading-4 text-soft',
          limit > 0.9 ? '-translate-x-full text-right' : '-translate-x-1/2 text-center',
        )}
      >
        {limitDays}
        <br />
        limit
      </span>
    </div>
  );
}
