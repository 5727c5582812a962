import { useMutation } from '@tanstack/react-query';
import { useState } from 'react';
import { setAccessPoints, type VesselSettings } from '../../../shared/api/vessels.ts';
import { ACCESS_POINT_NAME_MAX, ACCESS_POINTS_MAX, DECK_NAME_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { Empty } from '../../components/PageState.tsx';
import { checkForm } from '../../lib/forms.ts';
import { WhoMay } from './Facts.tsx';
import { PlaceEditor } from './PlaceEditor.tsx';
import { PlaceList } from './PlaceList.tsx';
import { type PlaceRow, placesOf, rowsOf, withNew } from './placeRows.ts';
import { saveAccessPoints } from './queries.ts';

const WAYS: Record<VesselSettings['driver'], string> = {
  by_hand: 'A new passphrase is entered into each of them by hand, from the entry sheet of the change.',
  rehearsal: 'This vessel rehearses: a new passphrase reaches them by itself.',
};

/** Access points in their order; all of them must get a new passphrase. */
export function AccessPoints({ settings, mayEdit }: { settings: VesselSettings; mayEdit: boolean }) {
  const { say } = useNotices();
  const [rows, setRows] = useState<PlaceRow[] | null>(null);
  const [checked, setChecked] = useState<unknown>(null);
  const save = useMutation({
    mutationFn: (places: readonly PlaceRow[]) => saveAccessPoints(settings.id, placesOf(places)),
    onSuccess: () => {
      setRows(null);
      say('The access points are saved.');
    },
  });
  const { accessPoints } = settings;
  if (rows !== null) {
    return (
      <PlaceEditor
        word="access point"
        list="accessPoints"
        rows={rows}
        onChange={setRows}
        nameMax={ACCESS_POINT_NAME_MAX}
        deckMax={DECK_NAME_MAX}
        max={ACCESS_POINTS_MAX}
        deckHint="Names as they are written on the access points. The deck may be left empty. Changes go through them in this order."
        error={checked ?? save.error}
        isSaving={save.isPending}
        onSave={() => {
          const body = { accessPoints: placesOf(rows) };
          const result = setAccessPoints.body ? checkForm(setAccessPoints.body, body) : null;
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
  const begin = () => setRows(accessPoints.length > 0 ? rowsOf(accessPoints) : withNew([]).rows);
  return (
    <>
      {mayEdit ? null : <WhoMay>The captain and the ETO change the access points.</WhoMay>}
      {accessPoints.length === 0 ? (
        <Empty
          title="No access points yet."
          action={
            mayEdit ? (
              <Button kind="primary" onClick={begin}>
                Add the first access point
              </Button>
            ) : null
          }
        >
          A change goes from one to the next, so it cannot be carried out before they are listed.
        </Empty>
      ) : (
        <>
          <PlaceList places={accessPoints} noDeck="No deck given" />
          <p className="text-sm text-soft">{WAYS[settings.driver]}</p>
          {mayEdit ? (
            <Button className="self-start" onClick={begin}>
              Edit the access points
            </Button>
          ) : null}
        </>
      )}
    </>
  );
}
