import { Temporal } from 'temporal-polyfill';
import { shipInstant, shipTime, type ZoneSpan } from '../../shared/rules/shipTime.ts';

const DAY_MS = 86_400_000;

/** Days and hours of one vessel's clock, counted from today in ship's time. */
export class Calendar {
  private readonly today: Temporal.PlainDate;

  constructor(
    readonly zones: readonly ZoneSpan[],
    private readonly now: Date,
  ) {
    this.today = shipTime(zones, now).toPlainDate();
  }

  /** `HH:MM` by the ship's clock, so many days from today. */
  at(days: number, time: string): Date {
    const date = this.today.add({ days });
    return shipInstant(this.zones, date.toPlainDateTime(Temporal.PlainTime.from(time)));
  }

  /** The last time it was `HH:MM` aboard that is at least so many whole days of 24 hours ago. */
  aged(days: number, time: string): Date {
    const latest = this.now.getTime() - days * DAY_MS;
    const sameDay = this.at(-days, time);
    return sameDay.getTime() <= latest ? sameDay : this.at(-days - 1, time);
  }
}

export const minutes = (from: Date, count: number): Date => new Date(from.getTime() + count * 60_000);
export const earlier = (one: Date, other: Date): Date => (one.getTime() <= other.getTime() ? one : other);
