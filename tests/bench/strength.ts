import { randomInt } from 'node:crypto';
import { monitorEventLoopDelay, performance } from 'node:perf_hooks';
import { ZxcvbnFactory } from '@zxcvbn-ts/core';
import * as common from '@zxcvbn-ts/language-common';
import * as english from '@zxcvbn-ts/language-en';
import { generate } from '../../server/passphrases/generate.ts';
import { Scorer } from '../../server/passphrases/score.ts';
import { PASSPHRASE_MAX } from '../../shared/rules/limits.ts';

const ROUNDS = 7;
const CONTEXT = ['tamarisk', 'mytamarisk', 'tamarisk guests', 'split', 'brandvold'];

/** 63 characters each, made to cost a scorer as much as they can. */
function hostileInputs(): Record<string, string> {
  const fill = (pattern: string): string => pattern.repeat(PASSPHRASE_MAX).slice(0, PASSPHRASE_MAX);
  const random = (letters: string): string =>
    Array.from({ length: PASSPHRASE_MAX }, () => letters.charAt(randomInt(letters.length))).join('');
  const printable = Array.from({ length: 95 }, (_, index) => String.fromCharCode(0x20 + index)).join('');
  return {
    'one letter': fill('a'),
    'swapped letters, repeating': fill('p@ssw0rd'),
    'swapped letters, mixed': fill('4@8({[<369&#!1|0$5+7%2/\\'),
    'swapped letters, random': random('4@8({[<369&#!1|0$5+7%2aeiost'),
    'letters of several signs': random('|<-/\\()[]{}_^~'),
    digits: random('0123456789'),
    dates: fill('13.11.1991-1.1.2001/'),
    'keyboard runs': fill('qwertyuiopasdfghjklzxcvbnm'),
    'printable, random': random(printable),
    'words run together': Array.from({ length: 4 }, () => generate().passphrase.replaceAll('-', ''))
      .join('')
      .slice(0, PASSPHRASE_MAX),
  };
}

function median(values: readonly number[]): number {
  const sorted = [...values].sort((left, right) => left - right);
  return sorted[Math.floor(sorted.length / 2)] ?? Number.NaN;
}

function rounded(value: number): number {
  return Math.round(value * 10) / 10;
}

/**
 * How long the worker needs for hostile passphrases and how long the event loop is held up meanwhile, against
 * the plain way (default options, on the event loop), taken in turn. `workerWorstMs` and `plainWorstMs` are
 * the worst input's median over the rounds; the loop delays are medians over the rounds of each round's
 * longest. A delay is what the loop is late by, beyond the sampling interval of 1 ms.
 */
export async function bench(): Promise<Record<string, number>> {
  const plain = new ZxcvbnFactory({
    dictionary: { ...common.dictionary, ...english.dictionary },
    graphs: common.adjacencyGraphs,
  });
  const scorer = new Scorer();
  await scorer.score('warming up the dictionaries', CONTEXT);
  plain.check('warming up the dictionaries', CONTEXT);

  const inputs = Object.entries(hostileInputs());
  const ours = inputs.map((): number[] => []);
  const theirs = inputs.map((): number[] => []);
  const ourDelays: number[] = [];
  const theirDelays: number[] = [];
  for (let round = 0; round < ROUNDS; round++) {
    ourDelays.push(
      await longestDelay(async () => {
        for (const [index, [, input]] of inputs.entries()) {
          ours[index]?.push(await timed(() => scorer.score(input, CONTEXT)));
        }
      }),
    );
    theirDelays.push(
      await longestDelay(async () => {
        for (const [index, [, input]] of inputs.entries()) {
          theirs[index]?.push(await timed(async () => plain.check(input, CONTEXT)));
          await new Promise((turn) => setImmediate(turn));
        }
      }),
    );
    console.log(`round ${round + 1} of ${ROUNDS}`);
  }
  await scorer.close();

  for (const [index, [name]] of inputs.entries()) {
    const figures = [ours[index] ?? [], theirs[index] ?? []].map((times) => rounded(median(times)));
    console.log(`${name}: worker ${figures[0]} ms, plain ${figures[1]} ms`);
  }
  return {
    workerWorstMs: rounded(Math.max(...ours.map(median))),
    loopDelayMs: rounded(median(ourDelays)),
    plainWorstMs: rounded(Math.max(...theirs.map(median))),
    plainLoopDelayMs: rounded(median(theirDelays)),
    rounds: ROUNDS,
  };
}

async function timed(work: () => Promise<unknown>): Promise<number> {
  const start = performance.now();
  await work();
  return performance.now() - start;
}

/** Longest time in ms the event loop was late while `work` ran. */
async function longestDelay(work: () => Promise<void>): Promise<number> {
  const delay = monitorEventLoopDelay({ resolution: 1 });
  delay.enable();
  // The monitor counts from its first tick, so give it one before the work begins.
  await new Promise((tick) => setTimeout(tick, 5));
  await work();
  await new Promise((tick) => setTimeout(tick, 5));
  delay.disable();
  return Math.max(0, delay.max / 1e6 - 1);
}
