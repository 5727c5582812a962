import { Button } from './Button.tsx';

interface PagerProps {
  /** Read out ("Pages of the table"). */
  label: string;
  /** Counted from 1. */
  page: number;
  pages: number;
  onPage: (page: number) => void;
}

/** The way between the pages of a list; nothing where there is one page. */
export function Pager({ label, page, pages, onPage }: PagerProps) {
  if (pages <= 1) return null;
  return (
    <nav aria-label={label} className="flex items-center gap-4 text-sm text-soft">
      <Button disabled={page <= 1} onClick={() => onPage(page - 1)}>
        Before
      </Button>
      <span>
        {page} of {pages}
      </span>
      <Button disabled={page >= pages} onClick={() => onPage(page + 1)}>
        Next
      </Button>
    </nav>
  );
}
