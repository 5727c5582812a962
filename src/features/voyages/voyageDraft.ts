import type { VoyageKind } from '../../../shared/api/common.ts';
import type { VoyageForm, VoyageView } from '../../../shared/api/voyages.ts';
import { VOYAGE_KIND_NAMES } from '../../../shared/rules/voyageKinds.ts';
import { serverNow } from '../../lib/clock.ts';
import type { ApiError } from '../../lib/errors.ts';
import { refusedForm } from '../../lib/forms.ts';
import { fromLocal, toLocal } from '../../lib/shipLocal.ts';

/** What is typed about a voyage, each field as its box holds it; times are local, in ship's time. */
export interface VoyageDraft {
  kind: VoyageKind;
  title: string;
  starts: string;
  ends: string;
  fromPort: string;
  toPort: string;
}

const DAY_MS = 86_400_000;

/** A charter of a week from tomorrow, 15:00 to 10:00 (common practice, no source). */
export function newDraft(zone: string): VoyageDraft {
  const onDay = (days: number, clock: string) =>
    `${toLocal(new Date(serverNow().getTime() + days * DAY_MS), zone).slice(0, 10)}T${clock}`;
  return {
    kind: 'charter',
    title: '',
    starts: onDay(1, '15:00'),
    ends: onDay(8, '10:00'),
    fromPort: '',
    toPort: '',
  };
}

/** A voyage as the boxes hold it. */
export const draftOf = (voyage: VoyageView, zone: string): VoyageDraft => ({
  kind: voyage.kind,
  title: voyage.title,
  starts: toLocal(voyage.startsAt, zone),
  ends: toLocal(voyage.endsAt, zone),
  fromPort: voyage.fromPort ?? '',
  toPort: voyage.toPort ?? '',
});

type Read = { ok: true; voyage: VoyageForm } | { ok: false; error: ApiError };

/** The draft as the server takes it, or what is wrong with its times, in the shape of the server's own answer. */
export function voyageOf(draft: VoyageDraft, zone: string): Read {
  const startsAt = fromLocal(draft.starts, zone);
  const endsAt = fromLocal(draft.ends, zone);
  const errors: Record<string, string[]> = {};
  if (!startsAt) errors.startsAt = ['Give the date and time it begins'];
  if (!endsAt) errors.endsAt = ['Give the date and time it ends'];
  if (startsAt && endsAt && endsAt <= startsAt)
    errors.endsAt = ['It ends after it begins; choose a later time'];
  if (!startsAt || !endsAt || errors.endsAt) return { ok: false, error: refusedForm(errors) };
  return {
    ok: true,
    voyage: {
      kind: draft.kind,
      title: draft.title.trim() || VOYAGE_KIND_NAMES[draft.kind],
      startsAt,
      endsAt,
      fromPort: draft.fromPort.trim() || null,
      toPort: draft.toPort.trim() || null,
    },
  };
}
