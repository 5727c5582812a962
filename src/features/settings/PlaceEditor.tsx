import { useEffect, useId, useState } from 'react';
import { Button } from '../../components/Button.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { fieldError, namesFields, sentenceFor } from '../../lib/errors.ts';
import { useFocusInvalid } from '../../lib/useFocusInvalid.ts';
import { moved, type PlaceRow, withNew } from './placeRows.ts';

interface PlaceEditorProps {
  /** "cabin", "access point": in labels and buttons. */
  word: string;
  /** The list's name in the request, which errors are keyed by ("cabins.3.name"). */
  list: string;
  rows: readonly PlaceRow[];
  onChange: (rows: PlaceRow[]) => void;
  nameMax: number;
  deckMax: number;
  /** How many there may be. */
  max: number;
  deckHint?: string;
  error: unknown;
  isSaving: boolean;
  onSave: () => void;
  onCancel: () => void;
}

/** Cabins or access points in their order: named, moved, added and taken away, then saved as a whole. */
export function PlaceEditor(props: PlaceEditorProps) {
  const { word, list, rows, onChange, nameMax, deckMax, max, deckHint, error, isSaving } = props;
  const decks = useId();
  const frame = useFocusInvalid(error);
  const [wanted, setWanted] = useState<string | null>(null);
  const [told, setTold] = useState('');
  useEffect(() => {
    if (wanted === null) return;
    frame.current?.querySelector<HTMLElement>(`[data-place="${wanted}"]`)?.focus();
    setWanted(null);
  }, [wanted, frame]);
  const edit = (index: number, changes: Partial<PlaceRow>) =>
    onChange(rows.map((row, at) => (at === index ? { ...row, ...changes } : row)));
  const move = (row: PlaceRow, index: number, step: -1 | 1) => {
    const to = index + step;
    if (to < 0 || to >= rows.length) return;
    onChange(moved(rows, index, step));
    setTold(`${row.name || `The new ${word}`} is now ${to + 1} of ${rows.length}.`);
    const canGoOn = to + step >= 0 && to + step < rows.length;
    setWanted(`${row.key}-${(step < 0) === canGoOn ? 'up' : 'down'}`);
  };
  const remove = (row: PlaceRow, index: number) => {
    onChange(rows.filter(({ key }) => key !== row.key));
    setTold(`${row.name || `The new ${word}`} is off the list; nothing is stored until you save.`);
    const next = rows[index + 1] ?? rows[index - 1];
    setWanted(next ? `${next.key}-name` : 'add');
  };
  const add = () => {
    const { rows: after, key } = withNew(rows);
    onChange(after);
    setWanted(`${key}-name`);
  };
  return (
    <form
      ref={frame}
      noValidate
      onSubmit={(event) => {
        event.preventDefault();
        if (!isSaving) props.onSave();
      }}
      className="flex max-w-3xl flex-col gap-4"
    >
      {deckHint ? <p className="text-sm text-soft">{deckHint}</p> : null}
      <datalist id={decks}>
        {[...new Set(rows.map(({ deck }) => deck).filter(Boolean))].map((deck) => (
          <option key={deck} value={deck} />
        ))}
      </datalist>
      <ol className="m-0 flex list-none flex-col border-t border-rule p-0">
        {rows.map((row, index) => {
          const which = row.name || `the new ${word}`;
          return (
            <li key={row.key} className="border-b border-rule py-3">
              <fieldset className="flex flex-wrap items-start gap-x-4 gap-y-2">
                <legend className="sr-only">
                  {word} {index + 1} of {rows.length}
                </legend>
                <TextInput
                  label="Deck"
                  list={decks}
                  value={row.deck}
                  maxLength={deckMax}
                  autoComplete="off"
                  className="min-w-0 grow basis-32"
                  onChange={(event) => edit(index, { deck: event.target.value })}
                  error={fieldError(error, `${list}.${index}.deck`)}
                />
                <TextInput
                  label="Name"
                  data-place={`${row.key}-name`}
                  value={row.name}
                  maxLength={nameMax}
                  autoComplete="off"
                  className="min-w-0 grow-2 basis-40"
                  onChange={(event) => edit(index, { name: event.target.value })}
                  error={fieldError(error, `${list}.${index}.name`)}
                />
                <div className="flex gap-2 sm:pt-[1.45rem]">
                  <Button
                    data-place={`${row.key}-up`}
                    aria-label={`Up, ${which}`}
                    disabled={index === 0}
                    onClick={() => move(row, index, -1)}
                  >
                    Up
                  </Button>
                  <Button
                    data-place={`${row.key}-down`}
                    aria-label={`Down, ${which}`}
                    disabled={index === rows.length - 1}
                    onClick={() => move(row, index, 1)}
                  >
                    Down
                  </Button>
                  <Button kind="quiet" aria-label={`Take off, ${which}`} onClick={() => remove(row, index)}>
                    Take off
                  </Button>
                </div>
              </fieldset>
            </li>
          );
        })}
      </ol>
      <p role="status" className="sr-only">
        {told}
      </p>
      {rows.length < max ? (
        <Button data-place="add" className="self-start" onClick={add}>
          Add {/^[aeiou]/.test(word) ? 'an' : 'a'} {word}
        </Button>
      ) : (
        <p className="text-sm text-soft">At most {max} are kept.</p>
      )}
      {error ? (
        <p role="alert" className="text-sm font-medium text-magenta">
          {namesFields(error) ? 'Some lines need another look. Nothing was changed.' : sentenceFor(error)}
        </p>
      ) : null}
      <div className="flex flex-wrap gap-3">
        <Button type="submit" kind="primary" busy={isSaving && 'Saving…'}>
          Save the list
        </Button>
        <Button onClick={props.onCancel}>Leave it as it was</Button>
      </div>
    </form>
  );
}
