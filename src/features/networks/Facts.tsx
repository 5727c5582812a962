import type { ReactNode } from 'react';
import type { NetworkView } from '../../../shared/api/networks.ts';
import { Flag } from '../../components/Flag.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { bitsInWords, eventsInWords, quietHoursInWords } from './policyWords.ts';
import { SECURITY_WORDS } from './words.ts';

/** Facts as pairs, hairlines between. */
export function Facts({ items }: { items: readonly { term: string; fact: ReactNode }[] }) {
  return (
    <dl className="m-0">
      {items.map(({ term, fact }) => (
        <div key={term} className="grid gap-x-4 border-b border-rule py-2 sm:grid-cols-[11rem_1fr]">
          <dt className="text-sm text-soft">{term}</dt>
          <dd className="m-0">{fact}</dd>
        </div>
      ))}
    </dl>
  );
}

/** A network's own facts. */
export function NetworkFacts({ network }: { network: NetworkView }) {
  return (
    <>
      <Facts
        items={[
          { term: 'Name as phones show it', fact: <SafeText>{network.ssid}</SafeText> },
          { term: 'Audience', fact: <Flag audience={network.audience} /> },
          { term: 'Security', fact: SECURITY_WORDS[network.security] },
          { term: 'Shown in lists', fact: network.hidden ? 'No, it is hidden' : 'Yes' },
          {
            term: 'Equipment',
            fact: network.carriesEquipment
              ? 'Carries bridge, navigation, alarm or monitoring equipment'
              : 'Carries none',
          },
          ...(network.note ? [{ term: 'Note', fact: <SafeText>{network.note}</SafeText> }] : []),
        ]}
      />
      {network.cautions.map((caution) => (
        <p key={caution} className="text-sm text-soft">
          {caution}
        </p>
      ))}
    </>
  );
}

/** A network's rules in words. */
export function PolicyFacts({ network }: { network: NetworkView }) {
  const { policy } = network;
  const events = eventsInWords(policy);
  return (
    <Facts
      items={[
        {
          term: 'Age limit',
          fact: `${policy.ageLimitDays} ${policy.ageLimitDays === 1 ? 'day' : 'days'}`,
        },
        { term: 'Changes', fact: `${quietHoursInWords(policy.quietHours)}, ship's time` },
        {
          term: 'Moved up when',
          fact: events.length > 0 ? events.join(', or ') : 'Nothing moves it up',
        },
        { term: 'Made of', fact: `${policy.words} words, or more where the least strength asks for it` },
        {
          term: 'Least strength',
          fact: `${policy.leastBits} bits: ${bitsInWords(policy.leastBits, network.security)}`,
        },
      ]}
    />
  );
}
