import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';

/** In the order in which rows may refer to each other. */
const TABLES = [
  'dealers',
  'vessels',
  'ship_zones',
  'cabins',
  'people',
  'memberships',
  'dealer_members',
  'networks',
  'access_points',
  'policies',
  'voyages',
  'parties',
  'guests',
  'crew_members',
  'rotations',
  'rotation_targets',
  'rotation_ways',
  'observations',
  'rehearsal_access_points',
  'cards',
] as const;
export type Table = (typeof TABLES)[number];
export type RowValue = string | number | boolean | Date | null | readonly object[] | readonly string[];

/** Collects rows and writes them a table at a time, so that a whole fleet takes a handful of statements. */
export class Rows {
  private readonly waiting = new Map<Table, Record<string, RowValue>[]>();

  add(table: Table, row: Record<string, RowValue>): void {
    const rows = this.waiting.get(table) ?? [];
    rows.push(row);
    this.waiting.set(table, rows);
  }

  /** Writes what has been collected since the last time. Columns not given keep their defaults. */
  async write(services: Services, tx: Tx): Promise<void> {
    for (const table of TABLES) {
      const rows = this.waiting.get(table);
      if (!rows) continue;
      this.waiting.delete(table);
      for (const [columns, alike] of byColumns(rows)) {
        await services.db.run(
          tx,
          `INSERT INTO ${table}(${columns}) SELECT ${columns} FROM jsonb_populate_recordset(NULL::${table}, $rows::jsonb)`,
          { rows: JSON.stringify(alike) },
        );
      }
    }
  }
}

/** Rows with the same columns together: the names are our own code's, never input. */
function byColumns(rows: readonly Record<string, RowValue>[]): Map<string, Record<string, RowValue>[]> {
  const groups = new Map<string, Record<string, RowValue>[]>();
  for (const row of rows) {
    const columns = Object.keys(row).join(', ');
    const group = groups.get(columns) ?? [];
    group.push(row);
    groups.set(columns, group);
  }
  return groups;
}
