import { useMutation, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import type { ArrivalsView, PartyForm } from '../../../shared/api/arrivals.ts';
import { CSV_MAX_BYTES } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Caution } from '../../components/Caution.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { Field } from '../../components/Field.tsx';
import { Select, TextArea } from '../../components/inputs.tsx';
import { Section } from '../../components/Page.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { ApiError, fieldError, sentenceFor } from '../../lib/errors.ts';
import { visibleText } from '../../lib/safeText.ts';
import { base64Of, type PreviewRow, wrongLines } from './listRows.ts';
import { newPartyDraft, type PartyDraft, PartyFields, partyOf } from './PartyDialog.tsx';
import { PreviewTable } from './PreviewTable.tsx';
import { arrivalsKey, importList, previewList } from './queries.ts';

interface ImportListProps {
  vesselId: string;
  arrivals: ArrivalsView;
  /** The party the list is for, when that is known already. */
  partyId: string | null;
  onAdded: (partyId: string, added: number) => void;
}

const NEW = '';

/** From a file or pasted lines to a party's list: read, look, correct, and only then store. */
export function ImportList({ vesselId, arrivals, partyId, onAdded }: ImportListProps) {
  const client = useQueryClient();
  const [list, setList] = useState<{ base64: string; name: string } | null>(null);
  const [pasted, setPasted] = useState('');
  const [tooLarge, setTooLarge] = useState<string | null>(null);
  const [rows, setRows] = useState<PreviewRow[]>([]);
  const [party, setParty] = useState(partyId ?? NEW);
  const [draft, setDraft] = useState<PartyDraft>(() => newPartyDraft(arrivals.zone));
  const [draftErrors, setDraftErrors] = useState<Partial<Record<keyof PartyDraft, string>>>({});

  const read = useMutation({
    mutationFn: (given: { base64: string; dateOrder?: 'day_first' | 'month_first' }) =>
      previewList(vesselId, given),
    onSuccess: (preview) => setRows([...preview.rows]),
  });
  const add = useMutation({
    mutationFn: (given: { partyId?: string; newParty?: PartyForm }) =>
      importList(vesselId, { ...given, rows: rows.map(({ line: _line, notes: _notes, ...row }) => row) }),
    onSuccess: async (done) => {
      await client.invalidateQueries({ queryKey: arrivalsKey(vesselId) });
      onAdded(done.partyId, done.added);
    },
  });

  const take = async (blob: Blob, name: string) => {
    add.reset();
    if (blob.size > CSV_MAX_BYTES) {
      setTooLarge(
        `“${visibleText(name)}” is larger than 2 MB. Save only the sheet with the guests as CSV, and choose that.`,
      );
      return;
    }
    setTooLarge(null);
    const base64 = await base64Of(blob);
    setList({ base64, name });
    read.mutate({ base64 });
  };
  const confirm = () => {
    if (add.isPending) return;
    if (party !== NEW) {
      add.mutate({ partyId: party });
      return;
    }
    const made = partyOf(draft, arrivals.zone);
    setDraftErrors('errors' in made ? made.errors : {});
    if ('party' in made) add.mutate({ newParty: made.party });
  };
  const preview = read.data;
  const wrong = preview ? wrongLines(preview.wrong) : [];
  const rowError = (index: number) => {
    if (!(add.error instanceof ApiError)) return undefined;
    const found = Object.entries(add.error.fields).find(([path]) => path.startsWith(`rows.${index}.`));
    return found?.[1].join(' ');
  };
  return (
    <>
      <Section aside title="The list">
        <p className="max-w-prose">
          A CSV file with one guest a line: name, cabin, language, under 16, from, until. Headings may be in
          English, French, Italian, Spanish or German, in any order. Other columns, such as passport numbers,
          are neither shown nor kept.
        </p>
        <Field label="Choose the file" error={tooLarge ?? undefined}>
          {(wiring) => (
            <input
              {...wiring}
              type="file"
              accept=".csv,.txt,.tsv,text/csv,text/plain,text/tab-separated-values"
              className="min-h-12 max-w-full text-sm file:mr-4 file:min-h-12 file:rounded-md file:border file:border-solid file:border-ink file:bg-paper file:px-4 file:text-base file:font-medium file:text-ink"
              onChange={(event) => {
                const file = event.target.files?.[0];
                if (file) void take(file, file.name);
                event.target.value = '';
              }}
            />
          )}
        </Field>
        <details>
          <summary className="py-2 text-deep underline underline-offset-4">Or paste the lines</summary>
          <div className="flex max-w-2xl flex-col items-start gap-3 pt-2">
            <TextArea
              className="w-full"
              label="Lines, headings first"
              rows={6}
              value={pasted}
              onChange={(event) => setPasted(event.target.value)}
            />
            <Button
              disabled={pasted.trim() === ''}
              onClick={() => void take(new Blob([pasted]), 'The pasted list')}
            >
              Read the lines
            </Button>
          </div>
        </details>
        {read.isPending ? <p role="status">Reading…</p> : null}
        {read.error ? (
          <p role="alert" className="font-medium text-magenta">
            {fieldError(read.error, 'text') ?? fieldError(read.error, 'base64') ?? sentenceFor(read.error)}
          </p>
        ) : null}
      </Section>
      {preview && list ? (
        <>
          {preview.dates === 'ask' ? (
            <Section aside title="One question">
              <p>The dates in this list can be read both ways. Which comes first, the day or the month?</p>
              <div className="flex flex-wrap gap-3">
                <Button onClick={() => read.mutate({ base64: list.base64, dateOrder: 'day_first' })}>
                  The day: 04/05 is 4 May
                </Button>
                <Button onClick={() => read.mutate({ base64: list.base64, dateOrder: 'month_first' })}>
                  The month: 04/05 is 5 April
                </Button>
              </div>
            </Section>
          ) : null}
          <Section aside title="What was read">
            <p role="status">
              <SafeText>{list.name}</SafeText>: {rows.length === 1 ? '1 guest' : `${rows.length} guests`} can
              be added
              {wrong.length > 0 ? `, ${wrong.length === 1 ? '1 line' : `${wrong.length} lines`} cannot` : ''}.
              Nothing is stored yet.
            </p>
            {preview.leftOut > 0 ? (
              <p className="text-sm text-soft">
                {preview.leftOut === 1 ? 'One column is' : `${preview.leftOut} columns are`} not needed and
                left out.
              </p>
            ) : null}
            {wrong.length > 0 ? (
              <Caution>
                <ul className="m-0 list-none p-0">
                  {wrong.map(({ line, sentences }) => (
                    <li key={line}>
                      Line {line}: {sentences.join(' ')}
                    </li>
                  ))}
                </ul>
              </Caution>
            ) : null}
          </Section>
          {rows.length > 0 ? (
            <PreviewTable
              rows={rows}
              cabins={arrivals.cabins}
              zone={arrivals.zone}
              errorOf={rowError}
              onChange={(index, row) =>
                setRows((before) => before.map((one, at) => (at === index ? row : one)))
              }
              onDrop={(index) => setRows((before) => before.filter((_row, at) => at !== index))}
            />
          ) : null}
          <Section aside title="The party">
            <Select
              label="Add them to"
              value={party}
              onChange={(event) => setParty(event.target.value)}
              options={[
                { value: NEW, label: 'A new party' },
                ...arrivals.parties.map(({ id, name }) => ({ value: id, label: name })),
              ]}
              error={fieldError(add.error, 'partyId')}
            />
            {party === NEW ? (
              <PartyFields
                draft={draft}
                onChange={setDraft}
                errors={{
                  name: draftErrors.name ?? fieldError(add.error, 'newParty.name'),
                  arrives: draftErrors.arrives ?? fieldError(add.error, 'newParty.arrivesAt'),
                  leaves: draftErrors.leaves ?? fieldError(add.error, 'newParty.leavesAt'),
                }}
              />
            ) : null}
            <ErrorLine error={add.error} />
            <Button
              kind="primary"
              size="large"
              className="self-start"
              disabled={rows.length === 0}
              busy={add.isPending && 'Adding…'}
              onClick={confirm}
            >
              {rows.length === 1 ? 'Add 1 guest' : `Add ${rows.length} guests`}
            </Button>
          </Section>
        </>
      ) : null}
    </>
  );
}
