import type { ReactNode } from 'react';

/** What is so, word by word, for those who may not change it. */
export function Facts({ items }: { items: readonly (readonly [ReactNode, ReactNode])[] }) {
  return (
    <dl className="grid max-w-2xl gap-x-8 sm:grid-cols-[14rem_1fr]">
      {items.map(([word, fact], index) => (
        // biome-ignore lint/suspicious/noArrayIndexKey: the facts of one list keep their order
        <div key={index} className="grid border-b border-rule py-2 sm:col-span-2 sm:grid-cols-subgrid">
          <dt className="text-soft">{word}</dt>
          <dd className="m-0 min-w-0">{fact}</dd>
        </div>
      ))}
    </dl>
  );
}

/** The line that says who may change what is only shown. */
export function WhoMay({ children }: { children: ReactNode }) {
  return <p className="text-sm text-soft">{children}</p>;
}
