import { existsSync } from 'node:fs';
import path from 'node:path';
import { databaseForServer } from './serverDatabase.mjs';
import { checkNode, main, packagesUp, ROOT, runToEnd, SetUpError, serverEnvironment } from './setUp.mjs';

// Runs one TypeScript program with packages, database and settings in place, as the standing commands need it.
await main(async () => {
  const [file = '', ...args] = process.argv.slice(2);
  if (!existsSync(path.join(ROOT, file)))
    throw new SetUpError(`There is no ${file || 'program named'} in this project.`);
  checkNode();
  packagesUp();
  const database = await databaseForServer();
  try {
    const env = serverEnvironment(database);
    await runToEnd(
      ['--import', 'tsx', 'server/bin/migrate.ts'],
      { ...env },
      'The database could not be brought up to date.',
    );
    await runToEnd(['--import', 'tsx', file, ...args], env, '');
  } finally {
    await database.stop();
  }
});
