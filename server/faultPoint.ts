import { writeSync } from 'node:fs';

let passes = 0;

/**
 * A named step at which a test may end this process, as a power cut would, or stop it, as a machine that hangs.
 * `QW_FAULT` is `name` or `name:n` for the n-th time it is passed, `QW_FAULT_SIGNAL` is SIGKILL unless it is
 * SIGSTOP; outside tests this does nothing.
 */
export function faultPoint(name: string): void {
  const wanted = process.env.QW_FAULT;
  if (wanted === undefined || process.env.NODE_ENV !== 'test') return;
  const [point, times = '1'] = wanted.split(':');
  if (point !== name) return;
  passes += 1;
  if (passes !== Number(times)) return;
  if (process.env.QW_FAULT_SIGNAL === 'SIGSTOP') {
    writeSync(1, `stopping at ${wanted}\n`);
    process.kill(process.pid, 'SIGSTOP');
  } else process.kill(process.pid, 'SIGKILL');
}
