import { Loading } from '../components/PageState.tsx';
import { Scale } from '../components/Scale.tsx';

/** What is shown until the first page's parts have come. */
export function FirstLoad() {
  return (
    <>
      <Scale segments={24} className="h-[7px]" />
      <main id="main" className="px-4 sm:px-8">
        <Loading>Fetching Quayword…</Loading>
      </main>
    </>
  );
}
