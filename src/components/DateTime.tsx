import { useNow } from '../lib/clock.ts';
import {
  ageInWords,
  shipClock,
  shipDate,
  shipDateTime,
  shipMoment,
  shipMomentInWords,
} from '../lib/shipTime.ts';

interface DateTimeProps {
  /** ISO instant from the API. */
  at: string;
  /** IANA name of the ship's zone. */
  zone: string;
  /**
   * `full` "Sat 20 June 10:00"; `moment` only the clock on the ship's today; `words` "today 10:00" inside a
   * sentence; `date`; `clock`; `age` "3 hours".
   */
  as?: 'full' | 'moment' | 'words' | 'date' | 'clock' | 'age';
}

/** An instant in ship's time; the machine-readable instant and the full date stand behind it. */
export function DateTime({ at, zone, as = 'full' }: DateTimeProps) {
  const now = useNow();
  const full = shipDateTime(at, zone, now);
  const text = {
    full: () => full,
    moment: () => shipMoment(at, zone, now),
    words: () => shipMomentInWords(at, zone, now),
    date: () => shipDate(at, zone, now),
    clock: () => shipClock(at, zone),
    age: () => ageInWords(at, now),
  }[as]();
  return (
    <time dateTime={at} title={as === 'full' ? undefined : `${full}, ship's time`}>
      {text}
    </time>
  );
}
