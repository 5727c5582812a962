import { z } from 'zod';
import { CARD_LANGUAGES } from '../messages/card.ts';
import { PAGE_DEFAULT, PAGE_MAX } from '../rules/limits.ts';
import { AUDIENCES, DEALER_ROLES, VESSEL_ROLES } from '../rules/permissions.ts';
import { isPlainLine } from '../rules/plainLine.ts';
import { WIFI_SECURITIES } from '../rules/wifi.ts';

export const id = z.uuid('This is not an identifier we made');
const likeThis = 'Give a date and a time, such as 2026-06-14T09:00:00Z';
/** An instant in UTC, ISO 8601 with `Z`, of a year that a vessel's calendar can mean: 1900 to 2199 (common practice, no source). */
export const instant = z.iso
  .datetime({ error: likeThis })
  .refine((text) => text >= '19' && text < '22', likeThis);
export const audience = z.enum(AUDIENCES);
export const vesselRole = z.enum(VESSEL_ROLES);
export const dealerRole = z.enum(DEALER_ROLES);
export const security = z.enum(WIFI_SECURITIES);
export const cardLanguage = z.enum(CARD_LANGUAGES);
export const language = z.enum([
  'en',
  'fr',
  'it',
  'es',
  'de',
  'pt',
  'nl',
  'el',
  'ru',
  'tr',
  'ar',
  'zh',
  'ja',
]);
export const cardFormat = z.enum(['wallet', 'wallet-sheet', 'cabin']);
export const source = z.enum(['dock', 'cellular', 'satellite']);
export const voyageKind = z.enum(['charter', 'owner_trip', 'crossing', 'yard']);
export const driver = z.enum(['by_hand', 'rehearsal']);
export const rotationState = z.enum([
  'planned',
  'staged',
  'handed_out',
  'applying',
  'unknown',
  'needs_somebody',
  'reconciling',
  'live',
  'drifted',
  'retired',
  'cancelled',
  'superseded',
]);

export type Security = z.infer<typeof security>;
export type { CardLanguage } from '../messages/card.ts';
export type Language = z.infer<typeof language>;
export type CardFormat = z.infer<typeof cardFormat>;
export type VoyageKind = z.infer<typeof voyageKind>;
export type RotationState = z.infer<typeof rotationState>;
export type Source = z.infer<typeof source>;

/** Path parameters of a route below one vessel. */
export const vesselParams = z.strictObject({ vesselId: id });
/** Path parameters of a route below one network. */
export const networkParams = vesselParams.extend({ networkId: id });

/** Keyset paging: the cursor is opaque and signed by the server. */
export const pageQuery = z.strictObject({
  after: z.string().max(400).optional(),
  limit: z.coerce.number().int().min(1).max(PAGE_MAX).default(PAGE_DEFAULT),
});

/** RFC 9457 problem details, as every error is answered. */
export const problem = z.strictObject({
  type: z.string(),
  title: z.string(),
  status: z.number().int(),
  code: z.string(),
  detail: z.string(),
  requestId: z.string(),
  /** Invalid fields keyed by path, each with sentences that say what would be right. */
  errors: z.record(z.string(), z.array(z.string())).optional(),
});
export type Problem = z.infer<typeof problem>;

/** Where a text is a person's or a thing's name: trimmed, no control characters. `missing` is said of an empty one. */
export const nameText = (max: number, missing = 'Give a name') =>
  z
    .string()
    .trim()
    .min(1, missing)
    .max(max, `Keep it to ${max} characters`)
    .refine(isPlainLine, 'Leave out line breaks and control characters');
