import type { Migration } from '../db/migration.ts';

/** Each step of a rotation, checked without reading a table; what the sweeps look for, and nothing besides. */
export const migration: Migration = {
  name: '0009_lean_rotations',
  sql: `
-- The list moves from a table into the check itself.
DO $make$
BEGIN
  EXECUTE (SELECT format($f$
CREATE OR REPLACE FUNCTION rotation_step_allowed() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF NEW.state <> OLD.state AND NOT OLD.state || ' ' || NEW.state = ANY (%L::text[]) THEN
    RAISE EXCEPTION 'a rotation may not go from %% to %%', OLD.state, NEW.state USING ERRCODE = 'check_violation';
  END IF;
  IF OLD.ticket IS NOT NULL AND NEW.ticket IS DISTINCT FROM OLD.ticket THEN
    RAISE EXCEPTION 'a ticket number never changes' USING ERRCODE = 'check_violation';
  END IF;
  IF OLD.to_passphrase_id IS NOT NULL AND NEW.to_passphrase_id IS DISTINCT FROM OLD.to_passphrase_id THEN
    RAISE EXCEPTION 'a ticket keeps its passphrase' USING ERRCODE = 'check_violation';
  END IF;
  RETURN NEW;
END $$;
$f$, array_agg(from_state || ' ' || to_state ORDER BY from_state, to_state)) FROM rotation_steps);
END $make$;
DROP TABLE rotation_steps;

-- A change lies staged for a day or two, and a look for planned ones need not pass all of those.
DROP INDEX rotations_due;
CREATE INDEX rotations_planned ON rotations(due_at, vessel_id) WHERE state = 'planned';
CREATE INDEX rotations_staged ON rotations(due_at) WHERE state = 'staged';

-- Asked once a statement at most, while the planner would count it for every row that is looked for by key.
ALTER FUNCTION fleet_vessels() COST 1 ROWS 1;

-- Numbers left unused when a connection ends only make the count of a key's uses too high, which is the safe side.
ALTER SEQUENCE vault_seals CACHE 100;

-- Room on the page for the next version of rows that are counted up again and again.
ALTER TABLE networks SET (fillfactor = 70);
ALTER TABLE log_heads SET (fillfactor = 50);
ALTER TABLE rotations SET (fillfactor = 80);
`,
};
