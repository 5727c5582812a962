import { useMutation, useQueryClient } from '@tanstack/react-query';
import type { Source } from '../../../shared/api/common.ts';
import { Button } from '../../components/Button.tsx';
import { Caution } from '../../components/Caution.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { sentenceFor } from '../../lib/errors.ts';
import { changeSource } from './queries.ts';

const AWAY: readonly { source: Source; label: string; done: string }[] = [
  { source: 'cellular', label: 'On cellular now', done: 'On cellular now.' },
  { source: 'satellite', label: 'On satellite now', done: 'On satellite now.' },
];

/** What to tell guests while the boat is on the dock's network, and the way to say that she no longer is. */
export function DockCaution({ vesselId }: { vesselId: string }) {
  const client = useQueryClient();
  const { say, undoable } = useNotices();
  const change = useMutation({
    mutationFn: (source: Source) => changeSource(vesselId, source),
    onSuccess: (_done, source) => {
      const made = AWAY.find((one) => one.source === source);
      if (made) undoable(made.done, () => change.mutate('dock'));
      return client.invalidateQueries({ queryKey: ['vessels', vesselId] });
    },
    onError: (error) => say(sentenceFor(error)),
  });
  return (
    <Caution
      action={
        <div className="-mt-2 -mb-2 -ml-4 flex flex-wrap">
          {AWAY.map(({ source, label }) => (
            <Button
              key={source}
              kind="quiet"
              busy={change.isPending && change.variables === source && 'Writing it down…'}
              onClick={() => change.mutate(source)}
            >
              {label}
            </Button>
          ))}
        </div>
      }
    >
      The boat is on the dock's shared network. Ask guests to hold off banking until we switch to cellular or
      satellite.
    </Caution>
  );
}
