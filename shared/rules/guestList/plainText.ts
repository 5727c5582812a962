/** A text as it is compared: no accents, no case, runs of anything but letters and digits as one space. */
export function plainly(text: string): string {
  return text
    .normalize('NFKD')
    .replace(/\p{M}/gu, '')
    .replaceAll('ß', 'ss')
    .toLowerCase()
    .replace(/[^\p{L}\p{N}]+/gu, ' ')
    .trim();
}

/** A cell as it may be quoted in a sentence: one line, not longer than a name. */
export function quoted(text: string): string {
  const line = text.replace(/[\p{C}\s]+/gu, ' ').trim();
  return `“${line.length > 40 ? `${line.slice(0, 39)}…` : line}”`;
}
