import type { ReactNode } from 'react';
import { SafeText } from '../../components/SafeText.tsx';
import { byDeck } from './placeRows.ts';

interface PlaceListProps {
  places: readonly { name: string; deck: string | null }[];
  /** Said in place of a deck that was not given. */
  noDeck: ReactNode;
}

/** Cabins or access points deck by deck, in their order. */
export function PlaceList({ places, noDeck }: PlaceListProps) {
  return (
    <dl className="grid max-w-2xl gap-x-8 sm:grid-cols-[14rem_1fr]">
      {byDeck(places).map(({ deck, names }) => (
        <div key={deck} className="grid border-b border-rule py-2 sm:col-span-2 sm:grid-cols-subgrid">
          <dt className="text-soft">{deck ? <SafeText>{deck}</SafeText> : noDeck}</dt>
          <dd className="m-0 flex min-w-0 flex-wrap gap-x-5 gap-y-1">
            {names.map((name) => (
              <span key={name} className="font-medium">
                <SafeText>{name}</SafeText>
              </span>
            ))}
          </dd>
        </div>
      ))}
    </dl>
  );
}
