import { z } from 'zod';
import { AUDIENCES, DEALER_ROLES, VESSEL_ROLES } from '../rules/permissions.ts';

export const id = z.uuid('This is not an identifier we made');
/** An instant in UTC, ISO 8601 with `Z`. */
export const instant = z.iso.datetime({ error: 'Give an instant such as 2026-06-14T09:00:00Z' });
export const audience = z.enum(AUDIENCES);
export const vesselRole = z.enum(VESSEL_ROLES);
export const dealerRole = z.enum(DEALER_ROLES);
export const security = z.enum(['wpa2', 'wpa3', 'transition']);
export const cardLanguage = z.enum(['en', 'fr', 'it', 'es', 'de']);
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
export type CardLanguage = z.infer<typeof cardLanguage>;
export type Language = z.infer<typeof language>;
export type CardFormat = z.infer<typeof cardFormat>;
export type VoyageKind = z.infer<typeof voyageKind>;
export type RotationState = z.infer<typeof rotationState>;
export type Source = z.infer<typeof source>;

/** Path parameters of a route below one vessel. */
export const vesselParams = z.strictObject({ vesselId: id });

/** Keyset paging: the cursor is opaque and signed by the server. */
export const pageQuery = z.strictObject({
  after: z.string().max(400).optional(),
  limit: z.coerce.number().int().min(1).max(100).default(50),
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
    // biome-ignore lint/suspicious/noControlCharactersInRegex: the rule is about control characters
    .refine((text) => !/[\u0000-\u001f\u007f]/.test(text), 'Leave out line breaks and control characters');
