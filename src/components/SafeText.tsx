import { visiblePieces } from '../lib/safeText.ts';

/**
 * Text somebody typed: kept from turning the direction of what stands around it, with each control character
 * shown as a mark (R33). Use it for every name, note and file name that comes from a person.
 */
export function SafeText({ children }: { children: string }) {
  const pieces = visiblePieces(children);
  return (
    <bdi>
      {pieces.map((piece, index) =>
        piece.kind === 'text' ? (
          piece.text
        ) : (
          <span
            // biome-ignore lint/suspicious/noArrayIndexKey: the pieces of one text have no other identity
            key={index}
            title="A hidden control character"
            className="mx-px rounded-sm border border-magenta px-0.5 text-[0.7em] text-magenta"
          >
            {piece.name}
          </span>
        ),
      )}
    </bdi>
  );
}
