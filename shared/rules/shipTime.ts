import { Temporal } from 'temporal-polyfill';

/** Ship's time: a zone in force from an instant until the next span's. */
export interface ZoneSpan {
  /** IANA name. */
  readonly zone: string;
  readonly fromAt: Date;
}

/** In the order in which they come into force. */
export function inOrder(zones: readonly ZoneSpan[]): readonly ZoneSpan[] {
  return [...zones].sort((one, other) => one.fromAt.getTime() - other.fromAt.getTime());
}

/** The zone in force at an instant; the first one before anything was in force, UTC when there is none. */
export function zoneAt(zones: readonly ZoneSpan[], at: Date): string {
  const ordered = inOrder(zones);
  let found = ordered[0]?.zone ?? 'UTC';
  for (const span of ordered) if (span.fromAt.getTime() <= at.getTime()) found = span.zone;
  return found;
}

/** An instant as the clock in the mess shows it. */
export function shipTime(zones: readonly ZoneSpan[], at: Date): Temporal.ZonedDateTime {
  return Temporal.Instant.fromEpochMilliseconds(at.getTime()).toZonedDateTimeISO(zoneAt(zones, at));
}

/**
 * The instant of a local date and time in ship's time, always exactly one. Where the zone's clocks skip it,
 * the offset before the gap counts (02:30 becomes 03:30); where they repeat it, the first one does. Source:
 * RFC 5545 section 3.3.5, which Temporal calls "compatible". Where ship's time itself changes zone, a local
 * time that comes twice is the first one, and one that never comes is the instant of the change.
 */
export function shipInstant(zones: readonly ZoneSpan[], local: Temporal.PlainDateTime): Date {
  const ordered = inOrder(zones);
  if (ordered.length <= 1) return instantIn(ordered[0]?.zone ?? 'UTC', local);
  let skippedAt: Date | null = null;
  for (const [index, span] of ordered.entries()) {
    const at = instantIn(span.zone, local);
    const from = index === 0 ? Number.NEGATIVE_INFINITY : span.fromAt.getTime();
    const until = ordered[index + 1]?.fromAt.getTime() ?? Number.POSITIVE_INFINITY;
    if (at.getTime() >= from && at.getTime() < until) return at;
    // Already past when this zone came into force, and not yet reached in the one before.
    if (at.getTime() < from) skippedAt ??= span.fromAt;
  }
  return skippedAt ?? instantIn(ordered.at(-1)?.zone ?? 'UTC', local);
}

function instantIn(zone: string, local: Temporal.PlainDateTime): Date {
  return new Date(local.toZonedDateTime(zone, { disambiguation: 'compatible' }).epochMilliseconds);
}
