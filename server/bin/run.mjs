import { existsSync } from 'node:fs';
import path from 'node:path';
import { databaseForServer, serverEnvironment } from './environment.mjs';
import {
  checkNode,
  main,
  orderlyEnd,
  ProgramFailed,
  packagesUp,
  ROOT,
  runToEnd,
  SetUpError,
  sentenceOf,
} from './setUp.mjs';

const tell = (sentence) => process.stderr.write(`${sentence}\n`);
const TSX = ['--import', 'tsx'];

// Runs one TypeScript program with packages, database and settings in place, as the standing commands need it. What
// the set-up says goes to the error output, so that the program's own output can be read by another program.
await main(async () => {
  checkNode();
  const [file = '', ...args] = process.argv.slice(2);
  if (file === '' || !existsSync(path.join(ROOT, file)))
    throw new SetUpError(
      `This version of Quayword has no ${file || 'such program'}, so there is nothing to run.`,
    );
  const children = [];
  const end = orderlyEnd({ children });
  end.onSignals((number) => 128 + number);
  try {
    await packagesUp({ log: tell, children });
    // The program that runs aboard is far from the database and must do without.
    const aboard = file.startsWith('server/relay/');
    const env = aboard ? process.env : await withDatabase(end, children);
    await runToEnd([...TSX, file, ...args], env, '', { children, stdio: 'inherit' });
    await end.stop(0);
  } catch (error) {
    if (!end.isStopping() && error.message) tell(sentenceOf(error));
    await end.stop(error instanceof ProgramFailed ? error.exitCode : 1);
  }
});

async function withDatabase(end, children) {
  const starting = databaseForServer(tell);
  end.last(() => starting.then((database) => database.stop()).catch(() => undefined));
  const database = await starting;
  const env = serverEnvironment(database);
  await runToEnd(
    [...TSX, 'server/bin/migrate.ts'],
    env,
    'The database could not be brought up to date. The lines above say why.',
    { children, stdio: ['ignore', 2, 2] },
  );
  return env;
}
