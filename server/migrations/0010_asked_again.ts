import type { Migration } from '../db/migration.ts';

/** A boat that does not answer is asked again, by whichever server looks next. */
export const migration: Migration = {
  name: '0010_asked_again',
  sql: `
ALTER TABLE rotations ADD COLUMN asked_at timestamptz;
COMMENT ON COLUMN rotations.asked_at IS 'when the boat was last asked again to carry it out; null: only when it was handed out';
`,
};
