import { Worker } from 'node:worker_threads';
import { CONTEXT_WORD_MAX, CONTEXT_WORDS_MAX, PASSPHRASE_MAX } from '../../shared/rules/limits.ts';
import { hardnessBits } from '../../shared/rules/strength.ts';

/** How many guesses a typed passphrase is worth; `bits` is the binary logarithm of that. */
export interface Score {
  guesses: number;
  bits: number;
}

/** The scorer could not answer; its message is a sentence for the person who asked. */
export class ScoreUnavailable extends Error {
  override readonly name = 'ScoreUnavailable';
}

interface Question {
  passphrase: string;
  context: readonly string[];
  answer: (score: Score) => void;
  fail: (error: Error) => void;
}

/** Questions that may wait; at 0.2 s for the worst of them, the last one waits under 13 s. */
const MOST_WAITING = 64;
/** Milliseconds one answer may take, the dictionaries' loading included, before the worker is replaced. */
const PATIENCE_MS = 15_000;

/**
 * Scores passphrases in one worker thread, because a hostile 63-character one takes over 100 ms and must not
 * hold up every other request. The worker starts with the first question (dictionaries: about half a second,
 * 100 MB), takes one question at a time, is replaced when it dies or hangs, and never keeps the process alive
 * by itself.
 */
export class Scorer {
  private worker: Worker | undefined;
  private current: Question | undefined;
  private timer: NodeJS.Timeout | undefined;
  private readonly waiting: Question[] = [];
  private readonly patience: number;

  /** @param patience milliseconds one answer may take before the worker is replaced. */
  constructor(patience = PATIENCE_MS) {
    this.patience = patience;
  }

  /**
   * @param context the vessel's own words, most telling first; see {@link contextWords}.
   * @throws ScoreUnavailable when too many wait already, or the worker died over this question.
   */
  score(passphrase: string, context: readonly string[]): Promise<Score> {
    if (this.waiting.length >= MOST_WAITING) {
      return Promise.reject(
        new ScoreUnavailable('Too many passphrases are being checked just now. Try again in a few seconds.'),
      );
    }
    return new Promise((answer, fail) => {
      this.waiting.push({
        passphrase: passphrase.slice(0, PASSPHRASE_MAX),
        context: context.slice(0, CONTEXT_WORDS_MAX).map((word) => word.slice(0, CONTEXT_WORD_MAX)),
        answer,
        fail,
      });
      this.askNext();
    });
  }

  /** Ends the worker; whatever still waits is refused. The next question starts a new one. */
  async close(): Promise<void> {
    const worker = this.detach();
    for (const question of [this.takeCurrent(), ...this.waiting.splice(0)]) {
      question?.fail(new ScoreUnavailable('The strength check was closed. Try again.'));
    }
    await worker?.terminate();
  }

  /** Thread id of the running worker, for tests and benchmarks. */
  get threadId(): number | undefined {
    return this.worker?.threadId;
  }

  private askNext(): void {
    if (this.current !== undefined) return;
    const question = this.waiting.shift();
    if (question === undefined) {
      this.worker?.unref();
      return;
    }
    this.current = question;
    this.worker ??= this.start();
    this.worker.ref();
    this.timer = setTimeout(() => this.lose(), this.patience);
    this.worker.postMessage({ passphrase: question.passphrase, context: question.context });
  }

  private start(): Worker {
    // No inherited loader flags: the worker is plain JavaScript and starts faster without them.
    const worker = new Worker(new URL('./scoreWorker.mjs', import.meta.url), {
      execArgv: [],
      resourceLimits: { maxOldGenerationSizeMb: 384 },
    });
    worker.on('message', ({ guesses }: { guesses: number }) => {
      if (worker !== this.worker) return;
      this.takeCurrent()?.answer({ guesses, bits: hardnessBits({ guesses }) });
      this.askNext();
    });
    // An uncaught error is followed by `exit`; without a listener it would take the server down.
    worker.on('error', () => {});
    worker.on('exit', () => {
      if (worker === this.worker) this.lose();
    });
    return worker;
  }

  /** The worker is gone or stuck: refuse the question it had, go on with the next in a new one. */
  private lose(): void {
    const worker = this.detach();
    void worker?.terminate();
    this.takeCurrent()?.fail(new ScoreUnavailable('The strength check stopped. Try again.'));
    this.askNext();
  }

  private detach(): Worker | undefined {
    const worker = this.worker;
    this.worker = undefined;
    return worker;
  }

  private takeCurrent(): Question | undefined {
    clearTimeout(this.timer);
    const question = this.current;
    this.current = undefined;
    return question;
  }
}

const shared = new Scorer();

/** Guesses a typed passphrase is worth, with the vessel's own words known to the guesser. */
export function scoreTyped(passphrase: string, context: readonly string[]): Promise<Score> {
  return shared.score(passphrase, context);
}

/** Ends the shared worker: part of stopping the server. */
export function closeScorer(): Promise<void> {
  return shared.close();
}

/**
 * The words somebody who knows the boat would try first, from names as they are written: each whole, without
 * its spaces and signs, and each part of three letters or more. Most telling names first: their place is
 * their rank as a guess.
 */
export function contextWords(names: readonly (string | null | undefined)[]): string[] {
  const whole: string[] = [];
  const parts: string[] = [];
  for (const name of names) {
    if (!name) continue;
    const pieces = name.split(/[^\p{L}\p{N}]+/u).filter((piece) => piece !== '');
    whole.push(name.toLowerCase(), pieces.join('').toLowerCase());
    parts.push(...pieces.filter((piece) => piece.length >= 3).map((piece) => piece.toLowerCase()));
  }
  return [...new Set([...whole, ...parts])].filter((word) => word !== '').slice(0, CONTEXT_WORDS_MAX);
}
