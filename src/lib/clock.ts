import { useEffect, useState } from 'react';

let offset = 0;

/**
 * Notes the server's clock from a response's `Date` header, so that a tablet whose clock is wrong still shows the
 * right hour. Differences under two seconds are the header's own rounding and are left out.
 */
export function noteServerDate(header: string | null, receivedAt: number): void {
  if (header === null) return;
  const server = Date.parse(header);
  if (Number.isNaN(server)) return;
  const difference = server - receivedAt;
  offset = Math.abs(difference) < 2_000 ? 0 : difference;
}

/** Now by the server's clock. */
export function serverNow(): Date {
  return new Date(Date.now() + offset);
}

/** Now by the server's clock, renewed every `everyMs` milliseconds (30 s unless said). */
export function useNow(everyMs = 30_000): Date {
  const [now, setNow] = useState(serverNow);
  useEffect(() => {
    const renew = () => setNow(serverNow());
    const timer = setInterval(renew, everyMs);
    document.addEventListener('visibilitychange', renew);
    return () => {
      clearInterval(timer);
      document.removeEventListener('visibilitychange', renew);
    };
  }, [everyMs]);
  return now;
}
