import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useEffect, useRef, useState } from 'react';
import type { PassphraseVerdict } from '../../../shared/api/passphrases.ts';
import { checkPassphrase } from '../../../shared/rules/passphrase.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { Attention } from '../../components/Sentence.tsx';
import { fieldError, namesFields, sentenceFor } from '../../lib/errors.ts';
import { fromLocal } from '../../lib/shipLocal.ts';
import { checkTyped, typeIn, vesselKey } from './queries.ts';

interface TypeInDialogProps {
  vesselId: string;
  networkId: string;
  ssid: string;
  /** IANA name of the ship's zone. */
  zone: string;
  onClose: () => void;
}

const PAUSE_MS = 600;

/**
 * Takes down the passphrase that is in force today, with what is to be said of it as it is typed. A weak one is
 * taken too, because it is the truth, and flagged.
 */
export function TypeInDialog({ vesselId, networkId, ssid, zone, onClose }: TypeInDialogProps) {
  const client = useQueryClient();
  const { say } = useNotices();
  const [passphrase, setPassphrase] = useState('');
  const [since, setSince] = useState('');
  const [wrong, setWrong] = useState<string | undefined>();
  const { verdict, judge, judging } = useVerdict(vesselId, networkId, passphrase);
  const save = useMutation({
    mutationFn: () =>
      typeIn(vesselId, networkId, { passphrase, since: since ? fromLocal(`${since}T00:00`, zone) : null }),
    onSuccess: async ({ verdict: judged }) => {
      await client.invalidateQueries({ queryKey: vesselKey(vesselId) });
      say(
        judged.grade === 'weak'
          ? 'Taken down as in force. It is weak, so change it soon.'
          : 'Taken down as in force.',
      );
      onClose();
    },
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const checked = checkPassphrase(passphrase);
    setWrong(checked.ok ? undefined : checked.reason);
    if (checked.ok && !save.isPending) save.mutate();
  };
  const refused = fieldError(save.error, 'passphrase');
  return (
    <Dialog
      open
      onClose={onClose}
      title={
        <>
          The passphrase in force on <SafeText>{ssid}</SafeText>
        </>
      }
      keepOpen
    >
      <form onSubmit={submit} noValidate className="flex flex-col gap-4" autoComplete="off">
        <p>Type in what the access points run today. This changes nothing aboard.</p>
        <TextInput
          label="Passphrase"
          hint="8 to 63 characters, exactly as a phone would type it."
          value={passphrase}
          autoComplete="off"
          autoCapitalize="none"
          autoCorrect="off"
          spellCheck={false}
          translate="no"
          boxClassName="[font-variant-ligatures:none]"
          onChange={(event) => {
            setPassphrase(event.target.value);
            setWrong(undefined);
            save.reset();
          }}
          onBlur={judge}
          error={wrong ?? refused}
        />
        <TextInput
          type="date"
          label="In force since"
          hint="As far as anybody knows, ship's time. Left empty, its age counts from today."
          value={since}
          onChange={(event) => setSince(event.target.value)}
          error={fieldError(save.error, 'since')}
        />
        <div role="status" className="min-h-12 text-sm">
          {verdict ? <Verdict verdict={verdict} /> : judging ? <p className="text-soft">Judging…</p> : null}
        </div>
        {save.error && !namesFields(save.error) ? (
          <p role="alert" className="text-sm font-medium text-magenta">
            {sentenceFor(save.error)}
          </p>
        ) : null}
        <div className="flex flex-wrap justify-end gap-3">
          <Button onClick={onClose}>Cancel</Button>
          <Button type="submit" kind="primary" busy={save.isPending && 'Saving…'}>
            It is in force
          </Button>
        </div>
      </form>
    </Dialog>
  );
}

/** Asks for a verdict when typing rests, or at once on leaving the box; an answer to older typing is dropped. */
function useVerdict(vesselId: string, networkId: string, passphrase: string) {
  const [judged, setJudged] = useState<{ of: string; verdict: PassphraseVerdict } | null>(null);
  const [judging, setJudging] = useState(false);
  const latest = useRef('');
  const ask = async (text: string) => {
    if (!checkPassphrase(text).ok || latest.current === text) return;
    latest.current = text;
    setJudging(true);
    try {
      const verdict = await checkTyped(vesselId, networkId, text);
      if (latest.current === text) setJudged({ of: text, verdict });
    } catch {
      // Without a verdict it can still be taken down; the server judges it again then.
      if (latest.current === text) latest.current = '';
    } finally {
      setJudging(false);
    }
  };
  // biome-ignore lint/correctness/useExhaustiveDependencies: only typing starts the pause again
  useEffect(() => {
    const timer = setTimeout(() => void ask(passphrase), PAUSE_MS);
    return () => clearTimeout(timer);
  }, [passphrase]);
  return {
    verdict: judged && judged.of === passphrase ? judged.verdict : null,
    judging,
    judge: () => void ask(passphrase),
  };
}

function Verdict({ verdict }: { verdict: PassphraseVerdict }) {
  return (
    <>
      <p>
        {verdict.grade === 'weak' ? (
          <Attention>Weak</Attention>
        ) : (
          <span className="font-medium text-shore-ink">{verdict.grade === 'fair' ? 'Fair' : 'Strong'}</span>
        )}
        : {verdict.words}. {verdict.why}
      </p>
      {verdict.grade === 'weak' ? <p>It is taken down as it is. Change it soon.</p> : null}
      {verdict.cautions.map((caution) => (
        <p key={caution}>{caution}</p>
      ))}
    </>
  );
}
