import { expect, test } from 'vitest';
import { keyFor, noteAnswered, noteUnanswered, requestDigest } from '../../src/lib/actionKeys.ts';

test('the same change carries the same key until somebody has answered it', async () => {
  const digest = await requestDigest('POST', '/vessels/1/handovers', { guest: 7 });
  const first = keyFor(digest);
  expect(keyFor(digest)).not.toBe(first);
  noteUnanswered(digest, first);
  expect(keyFor(digest)).toBe(first);
  noteAnswered(digest);
  expect(keyFor(digest)).not.toBe(first);
});

test('another method, path or body is another change', async () => {
  const seen = new Set([
    await requestDigest('POST', '/a', { guest: 7 }),
    await requestDigest('PUT', '/a', { guest: 7 }),
    await requestDigest('POST', '/b', { guest: 7 }),
    await requestDigest('POST', '/a', { guest: 8 }),
    await requestDigest('POST', '/a', undefined),
  ]);
  expect(seen.size).toBe(5);
});

test('R29: what is kept between two tries holds nothing of what was typed', async () => {
  const digest = await requestDigest('POST', '/networks/1/passphrase', { passphrase: 'harbour-lantern-41' });
  expect(digest).toMatch(/^[0-9a-f]{64}$/);
});
