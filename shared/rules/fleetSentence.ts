/** What the first line of the fleet's page is made of. */
export interface SentenceFigures {
  readonly vessels: number;
  readonly networks: number;
  /** Networks without a passphrase on record. */
  readonly ageUnknown: number;
  readonly pastLimit: number;
  /** Past the limit, and departed people hold the live passphrase. */
  readonly pastLimitExposed: number;
  /** Departed people hold the live passphrase, within the limit or past it. */
  readonly heldByDeparted: number;
  /** Exposed in any way, also by a lost card or a reported leak. */
  readonly exposed: number;
}

/**
 * The fleet in plain English: what is past its limit, and where people who have left still hold a live
 * passphrase. Where there is neither, it says so, and never more than the figures know.
 */
export function fleetSentence(figures: SentenceFigures): string {
  if (figures.vessels === 0) return 'There are no vessels in this fleet yet.';
  if (figures.networks === 0) {
    return figures.vessels === 1
      ? 'The one vessel of this fleet has no networks yet.'
      : `None of the ${figures.vessels} vessels of this fleet has networks yet.`;
  }
  const sentences = [limitSentence(figures), departedSentence(figures)];
  const unknown = figures.ageUnknown;
  if (unknown > 0 && unknown < figures.networks) {
    sentences.push(
      `On ${unknown} no passphrase is on record, so ${one(unknown, 'its age', 'their age')} cannot be told.`,
    );
  }
  return sentences.filter((sentence) => sentence !== '').join(' ');
}

function limitSentence({ networks, ageUnknown, pastLimit }: SentenceFigures): string {
  if (pastLimit > 0) return `${count(pastLimit)} past ${one(pastLimit, 'its', 'their')} limit.`;
  const known = networks - ageUnknown;
  if (known === 0) return 'No passphrase is on record yet, so no age can be told.';
  if (known === 1)
    return networks === 1 ? 'The one network is within its limit.' : '1 network is within its limit.';
  return ageUnknown === 0
    ? `All ${known} networks are within their limit.`
    : `${known} networks are within their limit.`;
}

function departedSentence(figures: SentenceFigures): string {
  const { pastLimit, pastLimitExposed, heldByDeparted, exposed, networks, ageUnknown } = figures;
  const holding = 'people who have left still hold the live passphrase';
  if (pastLimitExposed > 0) {
    return pastLimit === 1
      ? 'People who have left still hold its live passphrase.'
      : `On ${pastLimitExposed === pastLimit ? `all ${pastLimit}` : pastLimitExposed} of them, ${holding}.`;
  }
  if (heldByDeparted > 0) {
    if (pastLimit > 0) return `On ${heldByDeparted} ${one(heldByDeparted, 'other', 'others')}, ${holding}.`;
    return networks === 1
      ? 'People who have left still hold its live passphrase.'
      : `On ${heldByDeparted}, ${holding}.`;
  }
  if (exposed > 0) {
    return `On ${exposed}, a lost card or a reported leak gives the live passphrase away.`;
  }
  if (pastLimit > 0) return 'Nobody who has left holds a live passphrase.';
  return networks === ageUnknown ? '' : 'Nobody who has left holds a live passphrase.';
}

const one = (number: number, singular: string, plural: string) => (number === 1 ? singular : plural);
const count = (number: number) => (number === 1 ? '1 network is' : `${number} networks are`);
