import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';

/** SHA-256 of the EFF long list's words, a line feed after each. Four independent copies agree on it. */
export const EFF_LONG_LIST_SHA256 = '6d557f0693958fb5e650b68b5bee585eb82cf4da32965505c789e924743bc522';

/**
 * The 7776 words of the EFF long list in its own order. Throws when the file beside this one was changed: a
 * shorter or repeated list would make every passphrase weaker than its stated bits.
 */
export function readEffLongList(): readonly string[] {
  const text = readFileSync(new URL('./effLongList.txt', import.meta.url), 'utf8');
  const found = createHash('sha256').update(text).digest('hex');
  if (found !== EFF_LONG_LIST_SHA256) {
    throw new Error(
      'The word list server/passphrases/effLongList.txt was changed. Restore it from the repository.',
    );
  }
  return text.trimEnd().split('\n');
}

/**
 * The 7772 words passphrases are drawn from: the long list without its four hyphenated words, which would
 * blur the word count when a hyphen separates words (and `drop-down` would read like `dropdown`).
 */
export const WORDS: readonly string[] = readEffLongList().filter((word) => !word.includes('-'));
