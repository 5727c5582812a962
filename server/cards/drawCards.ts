import { type CardInput, renderCards, UnprintableText } from '../../print/cards.ts';
import { prepare } from '../../print/prepared.ts';
import type { CardFormat } from '../../shared/api/common.ts';
import { AppError, invalid } from '../errors.ts';

/** A card to be drawn, and where its person is in the request, to say whose card cannot be printed. */
export interface ToDraw {
  readonly input: CardInput;
  readonly field: string;
}

/** The file. Throws `invalid` naming whose card cannot be printed and why, `internal` when the printing itself fails. */
export async function drawCards(format: CardFormat, cards: readonly ToDraw[]): Promise<Buffer> {
  try {
    return await renderCards({ format, cards: cards.map(({ input }) => input) });
  } catch (cause) {
    if (cause instanceof UnprintableText) throw invalid(unprintable(cards, cause));
    if (cause instanceof RangeError) {
      throw invalid({
        format: ["This network's code is too large for the wallet card. Print cabin cards instead."],
      });
    }
    throw new AppError(
      'internal',
      'The cards could not be made just now, so none of them counts as printed. Try again, or show the code on the screen.',
      { cause },
    );
  }
}

/** Every person whose card cannot be printed; what concerns all cards once, under `format`. */
function unprintable(cards: readonly ToDraw[], first: UnprintableText): Record<string, string[]> {
  if (first.field !== 'guest name' && first.field !== 'cabin') return { format: [first.message] };
  const errors: Record<string, string[]> = {};
  for (const { input, field } of cards) {
    try {
      prepare(input, null);
    } catch (error) {
      if (error instanceof UnprintableText) errors[field] = [error.message];
    }
  }
  return Object.keys(errors).length > 0 ? errors : { format: [first.message] };
}
