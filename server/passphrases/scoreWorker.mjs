// Plain JavaScript, so that it starts the same under every way of running the server, with no loader of its
// own to wait for. One question at a time: { passphrase, context } in, { guesses } out.
import { parentPort } from 'node:worker_threads';
import { ZxcvbnFactory } from '@zxcvbn-ts/core';
import * as common from '@zxcvbn-ts/language-common';
import * as english from '@zxcvbn-ts/language-en';

// 10 substitutions instead of 100: a hostile 63-character input takes a tenth of the time and common
// substitutions still score the same (measured).
const scorer = new ZxcvbnFactory({
  dictionary: { ...common.dictionary, ...english.dictionary },
  graphs: common.adjacencyGraphs,
  l33tMaxSubstitutions: 10,
  maxLength: 63,
});

parentPort?.on('message', ({ passphrase, context }) => {
  parentPort?.postMessage({ guesses: scorer.check(passphrase, context).guesses });
});
