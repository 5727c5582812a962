/** A local date and time as a form holds it: `2026-06-20T10:00`. */
const LOCAL = /^(\d{4})-(\d{2})-(\d{2})T(\d{2}):(\d{2})$/;

function wallOf(instant: number, zone: string): string {
  const parts = new Intl.DateTimeFormat('en-GB', {
    timeZone: zone,
    calendar: 'gregory',
    hourCycle: 'h23',
    year: 'numeric',
    month: '2-digit',
    day: '2-digit',
    hour: '2-digit',
    minute: '2-digit',
  }).formatToParts(new Date(instant));
  const read = (type: Intl.DateTimeFormatPartTypes) => parts.find((part) => part.type === type)?.value ?? '';
  return `${read('year').padStart(4, '0')}-${read('month')}-${read('day')}T${read('hour')}:${read('minute')}`;
}

const asUtc = (local: string): number => Date.parse(`${local}:00Z`);

/** An instant as the ship's clock shows it, for a form's box. */
export function toLocal(instant: string | Date, zone: string): string {
  return wallOf(new Date(instant).getTime(), zone);
}

/**
 * The instant of a local date and time in a zone, or null when the text is not one. A time the clocks skip counts
 * with the offset before the gap, one they repeat is its first occurrence (RFC 5545 section 3.3.5), as on the server.
 */
export function fromLocal(local: string, zone: string): string | null {
  if (!LOCAL.test(local)) return null;
  const utc = asUtc(local);
  if (Number.isNaN(utc)) return null;
  const offsetAt = (instant: number) => asUtc(wallOf(instant, zone)) - instant;
  const day = 86_400_000;
  const before = utc - offsetAt(utc - day);
  const after = utc - offsetAt(utc + day);
  const found = wallOf(before, zone) === local || wallOf(after, zone) !== local ? before : after;
  return new Date(found).toISOString();
}
