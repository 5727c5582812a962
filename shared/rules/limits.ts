/**
 * Named limits. Each one feeds the request schema, the database column and the input field, so that the
 * three cannot disagree. Lengths are in characters (Unicode code points as the form counts them) unless the
 * name says octets or bytes.
 */

/** Shortest passphrase, characters 0x20–0x7E. IEEE 802.11-2012 M.4.1. */
export const PASSPHRASE_MIN = 8;
/** Longest passphrase, characters 0x20–0x7E. IEEE 802.11-2012 M.4.1; 64 hex digits would be a raw key. */
export const PASSPHRASE_MAX = 63;
/** Characters taken where a passphrase is typed: longer than any, so that the answer can say by how much. */
export const TYPED_MAX = 200;
/** Longest SSID in UTF-8 octets. IEEE 802.11, SSID element. */
export const SSID_MAX_OCTETS = 32;

/** Fewest words in a generated passphrase: 5 × log2(7772) = 64.62 bits, the first count above 64. */
export const WORDS_MIN = 5;
/** Most words: 8 of mean length 7 with separators still fit 63 characters about every second draw. */
export const WORDS_MAX = 8;
/** Least strength of anything Quayword generates, in bits. Project's own floor (common practice, no source). */
export const GENERATED_BITS_MIN = 64;
/** Range a network's policy may ask for, in bits. The upper end is what eight words give (common practice, no source). */
export const POLICY_BITS_MIN = 47;
export const POLICY_BITS_MAX = 102;

/** Age limit of a passphrase, in days (common practice, no source). */
export const AGE_LIMIT_DAYS_MIN = 1;
export const AGE_LIMIT_DAYS_MAX = 730;

/** A vessel's, person's, party's or dealer's name. */
export const NAME_MAX = 120;
export const CABIN_NAME_MAX = 60;
export const DECK_NAME_MAX = 60;
export const CABINS_MAX = 200;
export const NETWORKS_MAX = 24;
export const ACCESS_POINT_NAME_MAX = 60;
export const ACCESS_POINTS_MAX = 64;
export const NOTE_MAX = 500;
/** Free-text search box. */
export const SEARCH_MAX = 100;

/** RFC 5321 4.5.3.1.3 bounds the path at 256 octets with its angle brackets. */
export const EMAIL_MAX = 254;
/** A sign-in password. NIST SP 800-63B rev 3, 5.1.1: at least 8, allow 64 or more; never trimmed or cut. */
export const PASSWORD_MIN = 8;
export const PASSWORD_MAX = 128;

/** Party list upload, in bytes and in lines under the heading. */
export const CSV_MAX_BYTES = 2 * 1024 * 1024;
export const CSV_MAX_ROWS = 500;
/** JSON request body, in bytes. */
export const JSON_MAX_BYTES = 256 * 1024;
/** JSON that carries a party list: base64 takes four characters for three bytes (RFC 4648 section 4), and a little around it. */
export const LIST_MAX_BYTES = Math.ceil(CSV_MAX_BYTES / 3) * 4 + 1024;

/** Join cards of one print. */
export const PRINT_MAX = 500;
/** Rows of one page of a keyed list. */
export const PAGE_DEFAULT = 50;
export const PAGE_MAX = 100;

/** How long a handover can be undone, in seconds. */
export const UNDO_SECONDS = 10;
/** How long a revealed passphrase stays on the screen, in seconds. */
export const REVEAL_SECONDS = 30;
/** How long a guest's data may be kept after departure, in days: the range of the vessel's setting. */
export const RETENTION_DAYS_MIN = 1;
export const RETENTION_DAYS_MAX = 730;

/** Words of the vessel's own that the scorer compares with, and the length of each. */
export const CONTEXT_WORDS_MAX = 100;
export const CONTEXT_WORD_MAX = 64;
