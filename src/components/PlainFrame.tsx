import type { ReactNode } from 'react';
import { Scale } from './Scale.tsx';

interface PlainFrameProps {
  title: ReactNode;
  children: ReactNode;
}

/** The frame of pages that belong to no vessel: a chart's edge, the name, one column. */
export function PlainFrame({ title, children }: PlainFrameProps) {
  return (
    <div className="flex min-h-dvh flex-col">
      <header>
        <Scale segments={24} className="h-[7px]" />
        <p className="px-4 pt-5 text-2xl font-semibold sm:px-8">Quayword</p>
      </header>
      <main id="main" tabIndex={-1} className="mx-auto w-full max-w-md grow px-4 py-10 outline-none sm:py-16">
        <h1 className="mb-5 text-2xl">{title}</h1>
        <div className="flex flex-col items-start gap-5">{children}</div>
      </main>
    </div>
  );
}
