import type { ListPreview } from '../../../shared/api/arrivals.ts';

export type PreviewRow = ListPreview['rows'][number];

/** A file's bytes in base64, so that the server sees its encoding as it is. */
export async function base64Of(file: Blob): Promise<string> {
  const bytes = new Uint8Array(await file.arrayBuffer());
  let text = '';
  const step = 0x8000;
  for (let at = 0; at < bytes.length; at += step)
    text += String.fromCharCode(...bytes.subarray(at, at + step));
  return btoa(text);
}

/** Lines left out, each once, with all that is wrong on it. */
export function wrongLines(wrong: ListPreview['wrong']): { line: number; sentences: string[] }[] {
  const lines = new Map<number, string[]>();
  for (const { line, sentence } of wrong) lines.set(line, [...(lines.get(line) ?? []), sentence]);
  return [...lines].map(([line, sentences]) => ({ line, sentences })).sort((a, b) => a.line - b.line);
}
