import type { Migration } from '../db/migration.ts';

/** Finds a log's last signed head without reading them all; asked every few seconds. */
export const migration: Migration = {
  name: '0007_last_checkpoint',
  sql: 'CREATE INDEX log_checkpoints_last ON log_checkpoints(vessel_id, seq);',
};
