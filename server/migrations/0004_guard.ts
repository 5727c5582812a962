import type { Migration } from '../db/migration.ts';

/** Tables of one vessel that the vessel's own scope sees. */
export const OF_VESSEL = [
  'ship_zones',
  'cabins',
  'networks',
  'access_points',
  'policies',
  'passphrases',
  'passphrase_secrets',
  'rotations',
  'rotation_targets',
  'observations',
  'rotation_ways',
  'rehearsal_access_points',
  'voyages',
  'parties',
  'guests',
  'crew_members',
  'cards',
  'handovers',
  'holders',
  'leaks',
  'log_heads',
  'log_entries',
  'log_names',
  'log_checkpoints',
];

/** Of those, what a dealer's scope may read: no secret, no guest, no name. */
export const FOR_DEALER = [
  'ship_zones',
  'networks',
  'policies',
  'passphrases',
  'rotations',
  'holders',
  'leaks',
];

const tenant = OF_VESSEL.map(
  (table) => `
ALTER TABLE ${table} ENABLE ROW LEVEL SECURITY;
ALTER TABLE ${table} FORCE ROW LEVEL SECURITY;
CREATE POLICY ${table}_vessel ON ${table} TO quayword_application
  USING (vessel_id = nullif(current_setting('quayword.vessel', true), '')::uuid
         OR current_setting('quayword.scope', true) = 'system')
  WITH CHECK (vessel_id = nullif(current_setting('quayword.vessel', true), '')::uuid
         OR current_setting('quayword.scope', true) = 'system');
CREATE POLICY ${table}_owner ON ${table} TO CURRENT_USER USING (true) WITH CHECK (true);`,
).join('\n');

const fleet = FOR_DEALER.map(
  (table) => `
CREATE POLICY ${table}_fleet ON ${table} FOR SELECT TO quayword_application
  USING (current_setting('quayword.scope', true) = 'fleet' AND vessel_id IN
    (SELECT v.id FROM vessels v WHERE v.dealer_id = nullif(current_setting('quayword.dealer', true), '')::uuid));`,
).join('\n');

/**
 * Row-level security behind the code's own filters, and what the application's role may do.
 * `quayword_application` is a group role without log-in; the server's log-in role is its member.
 */
export const migration: Migration = {
  name: '0004_guard',
  sql: `
${tenant}
${fleet}
ALTER TABLE vessels ENABLE ROW LEVEL SECURITY;
ALTER TABLE vessels FORCE ROW LEVEL SECURITY;
CREATE POLICY vessels_owner ON vessels TO CURRENT_USER USING (true) WITH CHECK (true);
CREATE POLICY vessels_vessel ON vessels TO quayword_application
  USING (id = nullif(current_setting('quayword.vessel', true), '')::uuid
         OR current_setting('quayword.scope', true) = 'system')
  WITH CHECK (id = nullif(current_setting('quayword.vessel', true), '')::uuid
         OR current_setting('quayword.scope', true) = 'system');
CREATE POLICY vessels_fleet ON vessels FOR SELECT TO quayword_application
  USING (current_setting('quayword.scope', true) = 'fleet'
         AND dealer_id = nullif(current_setting('quayword.dealer', true), '')::uuid);

GRANT USAGE ON SCHEMA public TO quayword_application;
GRANT SELECT, INSERT, UPDATE, DELETE ON ALL TABLES IN SCHEMA public TO quayword_application;
GRANT USAGE ON ALL SEQUENCES IN SCHEMA public TO quayword_application;
REVOKE UPDATE, DELETE, TRUNCATE ON log_entries, log_checkpoints FROM quayword_application;
REVOKE UPDATE ON log_names FROM quayword_application;
REVOKE INSERT, UPDATE, DELETE ON rotation_steps FROM quayword_application;
REVOKE DELETE ON rotations, handovers, observations, passphrases FROM quayword_application;
REVOKE ALL ON migrations FROM quayword_application;
`,
};
