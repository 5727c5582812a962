import type { GuestView } from '../../../shared/api/arrivals.ts';
import { DateTime } from '../../components/DateTime.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { cx } from '../../lib/cx.ts';
import { useRoving } from '../../lib/useRoving.ts';
import { byDeck, guestCalled, guestNotes } from './guestWords.ts';

interface GuestListProps {
  guests: readonly GuestView[];
  zone: string;
  selected: string | null;
  onSelect: (guestId: string) => void;
  /** Read out. */
  label: string;
  /** Visitors have no cabin: until when they stay stands there instead. */
  visitors?: boolean;
}

/** People by deck and cabin, each a row to press. Arrow keys move between rows. */
export function GuestList({ guests, zone, selected, onSelect, label, visitors }: GuestListProps) {
  const { ref, onKeyDown } = useRoving<HTMLDivElement>();
  const groups = visitors ? [{ deck: '', guests: [...guests] }] : byDeck(guests);
  return (
    // biome-ignore lint/a11y/useSemanticElements: a fieldset would announce every row as a form's
    <div
      ref={ref}
      onKeyDown={onKeyDown}
      role="group"
      aria-label={label}
      className="@container flex flex-col gap-4"
    >
      {groups.map(({ deck, guests: onDeck }) => (
        <div key={deck}>
          {deck ? (
            <h2 className="border-b border-rule pb-1.5 text-sm font-medium text-soft">{deck}</h2>
          ) : null}
          <ul className="m-0 list-none p-0">
            {onDeck.map((guest, index) => (
              <li key={guest.id} className="border-b border-rule">
                <GuestRow
                  guest={guest}
                  zone={zone}
                  visitor={visitors === true}
                  sameCabin={index > 0 && onDeck[index - 1]?.cabin?.id === guest.cabin?.id && !visitors}
                  selected={guest.id === selected}
                  onSelect={() => onSelect(guest.id)}
                />
              </li>
            ))}
          </ul>
        </div>
      ))}
    </div>
  );
}

interface GuestRowProps {
  guest: GuestView;
  zone: string;
  visitor: boolean;
  sameCabin: boolean;
  selected: boolean;
  onSelect: () => void;
}

function GuestRow({ guest, zone, visitor, sameCabin, selected, onSelect }: GuestRowProps) {
  const notes = guestNotes(guest);
  return (
    <button
      type="button"
      data-row
      aria-pressed={selected}
      onClick={onSelect}
      className={cx(
        '-mx-2.5 grid min-h-14 w-[calc(100%+1.25rem)] grid-cols-[minmax(0,1fr)_auto] items-center gap-x-4 px-2.5 py-2 text-left @md:grid-cols-[9.5rem_minmax(0,1fr)_auto]',
        selected ? 'rounded-sm bg-land' : 'hover:bg-shoal',
      )}
    >
      <span className={cx('col-span-2 text-sm text-soft @md:col-span-1', sameCabin && '@max-md:hidden')}>
        {visitor ? (
          <>
            until <DateTime at={guest.untilAt} zone={zone} as="moment" />
          </>
        ) : sameCabin ? (
          <span className="sr-only">
            <SafeText>{guest.cabin?.name ?? ''}</SafeText>
          </span>
        ) : (
          <SafeText>{guest.cabin?.name ?? ''}</SafeText>
        )}
      </span>
      <span>
        <span className={cx('text-lg font-medium', guest.ashoreAt && 'text-soft line-through')}>
          <SafeText>{guestCalled(guest)}</SafeText>
        </span>
        {notes ? <span className="ml-2 text-sm text-soft">{notes}</span> : null}
      </span>
      <span className="text-right text-sm">
        <GuestState guest={guest} zone={zone} />
      </span>
    </button>
  );
}

function GuestState({ guest, zone }: { guest: GuestView; zone: string }) {
  if (guest.ashoreAt) {
    return (
      <span className="text-soft">
        Ashore <DateTime at={guest.ashoreAt} zone={zone} as="moment" />
      </span>
    );
  }
  if (!guest.handover)
    return (
      <span className="text-soft">
        {guest.printedCard ? `Card ${guest.printedCard.serial} ready` : 'Not yet'}
      </span>
    );
  const { channel, serial, at } = guest.handover;
  return (
    <>
      <span className="font-medium text-shore-ink">
        {channel === 'screen' ? 'Shown on screen' : serial ? `Card ${serial}` : 'Card'}
      </span>
      , <DateTime at={at} zone={zone} as="moment" />
    </>
  );
}
