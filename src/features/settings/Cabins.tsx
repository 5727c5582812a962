import { useMutation } from '@tanstack/react-query';
import { useState } from 'react';
import { setCabins, type VesselSettings } from '../../../shared/api/vessels.ts';
import { CABIN_NAME_MAX, CABINS_MAX, DECK_NAME_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { Empty } from '../../components/PageState.tsx';
import { checkForm } from '../../lib/forms.ts';
import { WhoMay } from './Facts.tsx';
import { PlaceEditor } from './PlaceEditor.tsx';
import { PlaceList } from './PlaceList.tsx';
import { type PlaceRow, placesOf, rowsOf, withNew } from './placeRows.ts';
import { saveCabins } from './queries.ts';

/** Cabins by deck. */
export function Cabins({ settings, mayEdit }: { settings: VesselSettings; mayEdit: boolean }) {
  const { say } = useNotices();
  const [rows, setRows] = useState<PlaceRow[] | null>(null);
  const [checked, setChecked] = useState<unknown>(null);
  const save = useMutation({
    mutationFn: (cabins: readonly PlaceRow[]) => saveCabins(settings.id, placesOf(cabins)),
    onSuccess: () => {
      setRows(null);
      say('The cabins are saved.');
    },
  });
  const { cabins } = settings;
  if (rows !== null) {
    return (
      <PlaceEditor
        word="cabin"
        list="cabins"
        rows={rows}
        onChange={setRows}
        nameMax={CABIN_NAME_MAX}
        deckMax={DECK_NAME_MAX}
        max={CABINS_MAX}
        deckHint="The arrivals screen keeps this order. Guests of a cabin you take off stay on their list, without a cabin."
        error={checked ?? save.error}
        isSaving={save.isPending}
        onSave={() => {
          const result = setCabins.body ? checkForm(setCabins.body, { cabins: placesOf(rows) }) : null;
          setChecked(result?.ok === false ? result.error : null);
          if (result?.ok) save.mutate(rows);
        }}
        onCancel={() => {
          setRows(null);
          setChecked(null);
          save.reset();
        }}
      />
    );
  }
  const begin = () => setRows(cabins.length > 0 ? rowsOf(cabins) : withNew([]).rows);
  return (
    <>
      {mayEdit ? null : <WhoMay>Only the captain changes the cabins.</WhoMay>}
      {cabins.length === 0 ? (
        <Empty
          title="No cabins yet."
          action={
            mayEdit ? (
              <Button kind="primary" onClick={begin}>
                Add the first cabin
              </Button>
            ) : null
          }
        >
          With them, the arrivals screen goes through the party cabin by cabin.
        </Empty>
      ) : (
        <>
          <PlaceList places={cabins} noDeck="No deck given" />
          {mayEdit ? (
            <Button className="self-start" onClick={begin}>
              Edit the cabins
            </Button>
          ) : null}
        </>
      )}
    </>
  );
}
