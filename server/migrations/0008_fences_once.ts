import type { Migration } from '../db/migration.ts';
import { FOR_DEALER, OF_VESSEL } from './0004_guard.ts';

// Sub-selects without an outer row are worked out once a statement, not once a row. `IS NOT NULL` instead of a
// comparison tells the planner what is so: the fence hides no row that the statement's own clauses have not left out
// already. Guessed at a two-hundredth a table, joins were begun at whole tables.
const SEES = (
  column: string,
) => `(${column} = (SELECT nullif(current_setting('quayword.vessel', true), '')::uuid)
  OR (SELECT nullif(current_setting('quayword.scope', true) = 'system', false)) IS NOT NULL)`;

const sees = [...OF_VESSEL.map((table) => [table, 'vessel_id'] as const), ['vessels', 'id'] as const]
  .map(
    ([table, column]) =>
      `ALTER POLICY ${table}_vessel ON ${table} USING (${SEES(column)}) WITH CHECK (${SEES(column)});`,
  )
  .join('\n');

const fleet = [...FOR_DEALER.map((table) => [table, 'vessel_id'] as const), ['vessels', 'id'] as const]
  .map(
    ([table, column]) =>
      `ALTER POLICY ${table}_fleet ON ${table} USING (${column} IN (SELECT fleet_vessels()));`,
  )
  .join('\n');

/** The same fences, asked once a statement. */
export const migration: Migration = {
  name: '0008_fences_once',
  sql: `
-- The vessels of the dealer whose scope it is; none in any other scope.
CREATE FUNCTION fleet_vessels() RETURNS SETOF uuid
  LANGUAGE sql STABLE SECURITY DEFINER SET search_path = public, pg_temp AS $$
  SELECT id FROM vessels WHERE current_setting('quayword.scope', true) = 'fleet'
    AND dealer_id = nullif(current_setting('quayword.dealer', true), '')::uuid $$;
${sees}
${fleet}
`,
};
