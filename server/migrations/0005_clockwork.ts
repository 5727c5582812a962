import type { Migration } from '../db/migration.ts';

/** What the clock's sweeps need: when they last looked, and a log head for every vessel to lock from the start. */
export const migration: Migration = {
  name: '0005_clockwork',
  sql: `
-- When a sweep last looked, by any server: tells a clock that jumped, or a long absence, from an ordinary tick.
CREATE TABLE sweep_clock (
  sole boolean PRIMARY KEY DEFAULT true CHECK (sole),
  last_at timestamptz NOT NULL
);
ALTER TABLE sweep_clock ENABLE ROW LEVEL SECURITY;
ALTER TABLE sweep_clock FORCE ROW LEVEL SECURITY;
CREATE POLICY sweep_clock_system ON sweep_clock TO quayword_application
  USING (current_setting('quayword.scope', true) = 'system')
  WITH CHECK (current_setting('quayword.scope', true) = 'system');
CREATE POLICY sweep_clock_owner ON sweep_clock TO CURRENT_USER USING (true) WITH CHECK (true);
GRANT SELECT, INSERT, UPDATE ON sweep_clock TO quayword_application;

-- Locks are taken in one order everywhere: the vessel's log head, then networks, then rotations.
INSERT INTO log_heads(vessel_id, seq, hash)
  SELECT id, 0, sha256('Quayword log'::bytea) FROM vessels ON CONFLICT DO NOTHING;
CREATE FUNCTION vessel_has_log() RETURNS trigger LANGUAGE plpgsql SECURITY DEFINER SET search_path = public, pg_temp AS $$
BEGIN
  INSERT INTO log_heads(vessel_id, seq, hash) VALUES (NEW.id, 0, sha256('Quayword log'::bytea)) ON CONFLICT DO NOTHING;
  RETURN NULL;
END $$;
CREATE TRIGGER vessel_log AFTER INSERT ON vessels FOR EACH ROW EXECUTE FUNCTION vessel_has_log();

CREATE INDEX passphrases_to_purge ON passphrases(retired_at) WHERE retired_at IS NOT NULL AND purged_at IS NULL;
`,
};
