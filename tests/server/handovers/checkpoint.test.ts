import { appendFile, mkdtemp, readFile, rm, symlink } from 'node:fs/promises';
import os from 'node:os';
import path from 'node:path';
import { describe, expect, test } from 'vitest';
import { appendLog } from '../../../server/handovers/appendLog.ts';
import {
  type Checkpoint,
  checkpointFile,
  checkpointKey,
  checkpointLogs,
} from '../../../server/handovers/checkpoint.ts';
import { type Verdict, verifyChain } from '../../../server/handovers/verifyChain.ts';
import type { LogKind } from '../../../shared/rules/logKinds.ts';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';

const app = useApp();
const make = factories(app);

const system = <T>(work: Parameters<typeof app.services.db.transaction<T>>[1]) =>
  app.services.db.transaction({ kind: 'system' }, work);

const log = (vesselId: string, ...kinds: LogKind[]) =>
  system((tx) =>
    appendLog(
      app.services,
      tx,
      kinds.map((kind) => ({ vesselId, kind, at: app.clock.now(), body: {} })),
    ),
  );

async function vesselWithLog(): Promise<string> {
  const vesselId = await make.vessel();
  await log(vesselId, 'vessel.added', 'vessel.changed');
  return vesselId;
}

const verify = (vesselId: string, outside: readonly Checkpoint[] = []): Promise<Verdict> =>
  system((tx) =>
    verifyChain(app.services.db, tx, vesselId, {
      key: checkpointKey(app.services.config.logSigningSeed),
      outside,
    }),
  );

describe('R46: the signed head follows what was disclosed', () => {
  test('within the next look after a reveal, where other entries wait for the hour', async () => {
    const vesselId = await vesselWithLog();
    const quiet = await vesselWithLog();
    await checkpointLogs(app.services);
    await log(vesselId, 'passphrase.revealed');
    await log(quiet, 'vessel.changed');
    expect(await checkpointLogs(app.services, 'disclosing')).toBe(1);
    expect(await verify(vesselId)).toMatchObject({ entries: 3, checkpoints: 2, bad: null });
    expect(await verify(quiet)).toMatchObject({ entries: 3, checkpoints: 1, bad: null });
    // Signed once; what comes after it waits again.
    await log(vesselId, 'vessel.changed');
    expect(await checkpointLogs(app.services, 'disclosing')).toBe(0);
    expect(await checkpointLogs(app.services)).toBe(2);
  });
});

describe('R56: the folder outside the database', () => {
  const inFolder = async (work: (folder: string, services: typeof app.services) => Promise<void>) => {
    const folder = await mkdtemp(path.join(os.tmpdir(), 'quayword-heads-'));
    try {
      await work(folder, { ...app.services, config: { ...app.services.config, checkpointDir: folder } });
    } finally {
      await rm(folder, { recursive: true, force: true });
    }
  };

  test('on a full disk: nothing is signed, and all of it is once there is room', () =>
    inFolder(async (folder, services) => {
      await checkpointLogs(app.services);
      const vesselId = await vesselWithLog();
      const file = path.join(folder, checkpointFile(vesselId));
      // The device that is always full (Linux, full(4)).
      await symlink('/dev/full', file);
      await expect(checkpointLogs(services)).rejects.toMatchObject({ code: 'ENOSPC' });
      expect(await verify(vesselId)).toMatchObject({ checkpoints: 0, bad: null });
      await rm(file);
      expect(await checkpointLogs(services)).toBe(1);
      expect(await verify(vesselId)).toMatchObject({ checkpoints: 1, bad: null });
    }));

  test('a line that a power cut left unfinished is cut off by the next, and the whole ones stay', () =>
    inFolder(async (folder, services) => {
      const vesselId = await vesselWithLog();
      await checkpointLogs(services);
      const file = path.join(folder, checkpointFile(vesselId));
      const whole = await readFile(file, 'utf8');
      for (let cut = 1; cut < whole.length; cut += 20) {
        await appendFile(file, whole.slice(0, cut));
        await log(vesselId, 'vessel.changed');
        await checkpointLogs(services);
        const lines = (await readFile(file, 'utf8')).split('\n');
        expect(lines.pop()).toBe('');
        expect(`${lines[0]}\n`).toBe(whole);
        const outside = lines.map((text) => JSON.parse(text) as Checkpoint);
        expect(await verify(vesselId, outside)).toMatchObject({ bad: null, checkpoints: 2 * outside.length });
      }
    }));
});
