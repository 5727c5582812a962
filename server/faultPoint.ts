let passes = 0;

/**
 * A named step at which a test may end this process, as a power cut would. `QW_FAULT` is `name` or `name:n`
 * for the n-th time it is passed; outside tests this does nothing.
 */
export function faultPoint(name: string): void {
  const wanted = process.env.QW_FAULT;
  if (wanted === undefined || process.env.NODE_ENV !== 'test') return;
  const [point, times = '1'] = wanted.split(':');
  if (point !== name) return;
  passes += 1;
  if (passes === Number(times)) process.kill(process.pid, 'SIGKILL');
}
