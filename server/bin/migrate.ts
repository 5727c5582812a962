import { migrate } from '../db/migrate.ts';

const ownerUrl = process.env.DATABASE_URL;
const appUrl = process.env.DATABASE_APP_URL;
if (!ownerUrl || !appUrl) {
  process.stderr.write('Set DATABASE_URL (owning role) and DATABASE_APP_URL (application role) first.\n');
  process.exit(1);
}
const ran = await migrate({ ownerUrl, appUrl });
process.stdout.write(
  ran.length ? `Database brought up to date: ${ran.join(', ')}\n` : 'Database is up to date\n',
);
