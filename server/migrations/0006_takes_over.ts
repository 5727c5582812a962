import type { Migration } from '../db/migration.ts';

/** A change that goes back starts with access points that may run either passphrase already. */
export const migration: Migration = {
  name: '0006_takes_over',
  sql: `
ALTER TABLE rotations ADD COLUMN takes_over boolean NOT NULL DEFAULT false;
COMMENT ON COLUMN rotations.takes_over IS
  'took over from a change that had been handed out: never cancelled, and both passphrases count from its start';
`,
};
