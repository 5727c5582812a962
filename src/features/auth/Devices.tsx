import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import type { DeviceView } from '../../../shared/api/auth.ts';
import { Button } from '../../components/Button.tsx';
import { PageState } from '../../components/PageState.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { useNow } from '../../lib/clock.ts';
import { ageInWords } from '../../lib/shipTime.ts';
import { FormError } from './FormError.tsx';
import { devicesQuery, endDevice } from './queries.ts';

/** Where the person is signed in, each with the way to end it. */
export function Devices() {
  const devices = useQuery(devicesQuery);
  return (
    <PageState query={devices} loading="Fetching your devices…" failed="Your devices could not be fetched.">
      {({ items }) => (
        <ul className="max-w-2xl border-t border-rule">
          {items.map((device) => (
            <Device key={device.id} device={device} />
          ))}
        </ul>
      )}
    </PageState>
  );
}

function Device({ device }: { device: DeviceView }) {
  const client = useQueryClient();
  const now = useNow();
  const end = useMutation({
    mutationFn: () => endDevice(device.id),
    onSettled: () => client.invalidateQueries({ queryKey: devicesQuery.queryKey }),
  });
  return (
    <li className="flex flex-wrap items-center justify-between gap-x-6 gap-y-2 border-b border-rule py-3">
      <div className="min-w-0">
        <p className="font-medium">
          <SafeText>{device.label}</SafeText>
        </p>
        <p className="text-sm text-soft">
          {device.current
            ? 'This device'
            : `Last used ${ageInWords(device.lastSeenAt, now)} ago, signed in ${ageInWords(device.createdAt, now)} ago`}
        </p>
        <FormError error={end.error} />
      </div>
      {device.current ? null : (
        <Button onClick={() => end.mutate()} busy={end.isPending && 'Ending…'}>
          Sign this one out
        </Button>
      )}
    </li>
  );
}
