import type { NetworkView } from '../../../shared/api/networks.ts';
import { hasStarted } from '../../../shared/rules/hasStarted.ts';
import { DateTime } from '../../components/DateTime.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { Attention } from '../../components/Sentence.tsx';
import { useNow } from '../../lib/clock.ts';
import { awaitsEntry, exposureWords } from './words.ts';

type Matter =
  | 'needs_somebody'
  | 'unknown'
  | 'drifted'
  | 'exposed'
  | 'overdue'
  | 'weak'
  | 'unrecorded'
  | 'waiting'
  | 'under_way'
  | 'due';

/** What of a network most needs saying; null when it is in order. */
export function matterOf(network: NetworkView, now: Date): Matter | null {
  const { change, drift, live, standing } = network;
  if (change?.state === 'needs_somebody' || change?.state === 'reconciling') return 'needs_somebody';
  if (change?.state === 'unknown') return 'unknown';
  if (drift) return 'drifted';
  if (standing === 'exposed') return 'exposed';
  if (standing === 'overdue') return 'overdue';
  if (live?.grade === 'weak') return 'weak';
  if (live === null) return 'unrecorded';
  if (change && awaitsEntry(change, now)) return 'waiting';
  if (change && hasStarted(change)) return 'under_way';
  return standing === 'due' ? 'due' : null;
}

const ORDER: readonly Matter[] = [
  'needs_somebody',
  'unknown',
  'drifted',
  'exposed',
  'overdue',
  'weak',
  'unrecorded',
  'waiting',
  'under_way',
  'due',
];

/** The network that needs something first, worst first; null when all are in order. */
export function worstOf(networks: readonly NetworkView[], now: Date): NetworkView | null {
  const rank = (network: NetworkView) => {
    const matter = matterOf(network, now);
    return matter === null ? ORDER.length : ORDER.indexOf(matter);
  };
  const [first] = [...networks].sort((one, other) => rank(one) - rank(other));
  return first && matterOf(first, now) !== null ? first : null;
}

/** When a network changes and what that asks of somebody, as the sentence after what is so. */
function WhatNext({ network, zone }: { network: NetworkView; zone: string }) {
  const now = useNow();
  const { change, may } = network;
  if (!change)
    return <>No change is planned. {may.plan ? 'Change it now.' : 'Ask the captain to change it.'}</>;
  if (hasStarted(change)) return <>{change.sentence}</>;
  if (awaitsEntry(change, now)) return <>Its new passphrase is ready: it has to be entered by hand now.</>;
  return (
    <>
      It changes <DateTime at={change.dueAt} zone={zone} as="words" />.
    </>
  );
}

/** What is so with one network and what to do about it. */
export function NetworkSentence({ network, zone }: { network: NetworkView; zone: string }) {
  const now = useNow();
  const name = <SafeText>{network.ssid}</SafeText>;
  const next = <WhatNext network={network} zone={zone} />;
  switch (matterOf(network, now)) {
    case 'needs_somebody':
      return (
        <>
          The change of {name} <Attention>needs somebody</Attention>. {network.change?.sentence}
        </>
      );
    case 'unknown':
      return (
        <>
          The change of {name} is <Attention>not yet known</Attention> to have worked.{' '}
          {network.change?.sentence}
        </>
      );
    case 'drifted':
      return (
        <>
          {name} is <Attention>not the same everywhere</Attention>. {network.drift?.sentence}
        </>
      );
    case 'exposed':
      return (
        <>
          {name} is <Attention>exposed</Attention>: {exposureWords(network)}. {next}
        </>
      );
    case 'overdue':
      return (
        <>
          {name} is <Attention>past its limit</Attention> of {network.policy.ageLimitDays} days. {next}
        </>
      );
    case 'weak':
      return (
        <>
          {name} has a <Attention>weak</Attention> passphrase: {network.live?.strength}. {next}
        </>
      );
    case 'unrecorded':
      return (
        <>
          No passphrase is on record for {name}.{' '}
          {network.change && hasStarted(network.change)
            ? network.change.sentence
            : 'Type in the one in force, or make one now.'}
        </>
      );
    case 'waiting':
      return (
        <>The new passphrase of {name} is ready. It has to be entered into the access points by hand now.</>
      );
    case 'under_way':
      return (
        <>
          {name} is being changed. {network.change?.sentence}
        </>
      );
    case 'due':
      return (
        <>
          {name} is close to its limit of {network.policy.ageLimitDays} days. {next}
        </>
      );
    case null:
      return (
        <>
          {name} is in order. {next}
        </>
      );
  }
}

/** What is so with a vessel's networks and what to do: the worst one, and how many more there are like it. */
export function NetworksSentence({ networks, zone }: { networks: readonly NetworkView[]; zone: string }) {
  const now = useNow();
  const worst = worstOf(networks, now);
  if (!worst) {
    const next = networks
      .filter(({ change }) => change !== null)
      .sort((one, other) => Date.parse(one.change?.dueAt ?? '') - Date.parse(other.change?.dueAt ?? ''))[0];
    return (
      <>
        {networks.length === 1
          ? 'The one network is in order.'
          : `All ${networks.length} networks are in order.`}{' '}
        {next?.change ? (
          <>
            The next to change is <SafeText>{next.ssid}</SafeText>,{' '}
            <DateTime at={next.change.dueAt} zone={zone} as="words" />.
          </>
        ) : null}
      </>
    );
  }
  const others = networks.filter((network) => network !== worst && matterOf(network, now) !== null).length;
  return (
    <>
      <NetworkSentence network={worst} zone={zone} />
      {others > 0 ? ` ${others} more ${others === 1 ? 'needs' : 'need'} a look below.` : ''}
    </>
  );
}
