import type { HoldersView, HolderView } from '../../../shared/api/handovers.ts';
import { DateTime } from '../../components/DateTime.tsx';
import { Flag } from '../../components/Flag.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { Attention } from '../../components/Sentence.tsx';

const THROUGH: Record<HolderView['through'], string> = {
  card: 'by card',
  screen: 'on a screen',
  own_page: 'on their own page',
  reveal: 'looked it up',
  entry_sheet: 'on the entry sheet',
  typed: 'typed it in',
};

const counted = (people: number): string =>
  people === 0 ? 'Nobody holds it. ' : people === 1 ? '1 person holds it. ' : `${people} people hold it. `;

/** For each network: who knows the passphrase in force, the departed first. */
export function Holders({ view }: { view: HoldersView }) {
  return (
    <div className="grid gap-x-10 gap-y-6 md:grid-cols-2 xl:grid-cols-3">
      {view.networks.map((network) => (
        <section key={network.id} className="flex flex-col gap-2">
          <h3 className="flex items-center gap-3 text-base font-medium">
            <Flag audience={network.audience} word={false} /> <SafeText>{network.ssid}</SafeText>
          </h3>
          <p className="text-sm text-soft">
            {network.since ? (
              <>
                In force since <DateTime at={network.since} zone={view.zone} />.{' '}
              </>
            ) : (
              'No passphrase on record. '
            )}
            {counted(network.current + network.departed)}
            {network.holders === null && network.departed > 0 ? (
              <Attention>{`${network.departed} of them left.`}</Attention>
            ) : null}
          </p>
          {network.leaks.map(({ kind, at }) => (
            <p key={`${kind} ${at}`} className="text-sm">
              <Attention>{kind === 'lost_card' ? 'A card is lost' : 'A leak was reported'}</Attention>,{' '}
              <DateTime at={at} zone={view.zone} as="words" />
            </p>
          ))}
          <ul className="m-0 list-none p-0 text-sm">
            {network.holders?.map((holder) => (
              <li
                key={`${holder.kind} ${holder.id}`}
                className="flex flex-wrap justify-between gap-x-4 border-b border-rule py-1.5"
              >
                <span>
                  <SafeText>{holder.name ?? holder.label ?? 'Without a name'}</SafeText>
                  {holder.departedAt ? (
                    <>
                      , <Attention>left</Attention>{' '}
                      <DateTime at={holder.departedAt} zone={view.zone} as="date" />
                    </>
                  ) : null}
                </span>
                <span className="text-soft">
                  {THROUGH[holder.through]}, <DateTime at={holder.since} zone={view.zone} as="moment" />
                </span>
              </li>
            ))}
          </ul>
        </section>
      ))}
    </div>
  );
}
