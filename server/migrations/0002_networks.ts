import type { Migration } from '../db/migration.ts';

/** Networks, policies, passphrases, rotations and what each access point was seen to run. */
export const migration: Migration = {
  name: '0002_networks',
  sql: `
CREATE TABLE networks (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  ssid text NOT NULL CHECK (octet_length(ssid) BETWEEN 1 AND 32),
  audience text NOT NULL CHECK (audience IN ('owner','guest','crew')),
  security text NOT NULL CHECK (security IN ('wpa2','wpa3','transition')),
  hidden boolean NOT NULL DEFAULT false,
  -- bridge, navigation, alarm or monitoring equipment joins it: no change during a crossing
  carries_equipment boolean NOT NULL DEFAULT false,
  note text CHECK (length(note) <= 500),
  -- last ticket number handed to a rotation of this network; only grows
  last_ticket bigint NOT NULL DEFAULT 0,
  last_generation integer NOT NULL DEFAULT 0,
  created_at timestamptz NOT NULL,
  updated_at timestamptz NOT NULL,
  removed_at timestamptz
);
CREATE INDEX networks_vessel ON networks(vessel_id) WHERE removed_at IS NULL;
CREATE UNIQUE INDEX networks_ssid ON networks(vessel_id, ssid) WHERE removed_at IS NULL;

CREATE TABLE access_points (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 60),
  deck text CHECK (length(deck) <= 60),
  position integer NOT NULL DEFAULT 0,
  removed_at timestamptz
);
CREATE UNIQUE INDEX access_points_name ON access_points(vessel_id, name) WHERE removed_at IS NULL;

CREATE TABLE policies (
  network_id uuid PRIMARY KEY REFERENCES networks(id) ON DELETE CASCADE,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  age_limit_days integer NOT NULL CHECK (age_limit_days BETWEEN 1 AND 1000),
  least_bits integer NOT NULL DEFAULT 64 CHECK (least_bits BETWEEN 40 AND 256),
  words integer NOT NULL DEFAULT 5 CHECK (words BETWEEN 4 AND 8),
  -- [{"days":[1..7], "from":"02:00", "to":"05:00"}], ISO weekdays, ship's time; empty = any time
  quiet_hours jsonb NOT NULL DEFAULT '[]',
  -- what moves a change up
  on_party_departure boolean NOT NULL DEFAULT false,
  on_sign_off boolean NOT NULL DEFAULT false,
  on_lost_card boolean NOT NULL DEFAULT true,
  on_leak boolean NOT NULL DEFAULT true,
  updated_at timestamptz NOT NULL
);

-- A passphrase's facts. Its secret lies apart, so that no query about ages can reach it.
CREATE TABLE passphrases (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  network_id uuid NOT NULL REFERENCES networks(id) ON DELETE CASCADE,
  generation integer NOT NULL,
  origin text NOT NULL CHECK (origin IN ('generated','typed')),
  -- log2 of the number of equally likely draws (generated) or of the guesses needed (typed)
  bits numeric(6,2) NOT NULL,
  created_at timestamptz NOT NULL,
  live_at timestamptz,
  retired_at timestamptz,
  purged_at timestamptz,
  UNIQUE (network_id, generation)
);
CREATE UNIQUE INDEX passphrases_live ON passphrases(network_id) INCLUDE (id, live_at)
  WHERE live_at IS NOT NULL AND retired_at IS NULL;
CREATE INDEX passphrases_vessel ON passphrases(vessel_id);

CREATE SEQUENCE vault_seals;
CREATE TABLE passphrase_secrets (
  passphrase_id uuid PRIMARY KEY REFERENCES passphrases(id) ON DELETE CASCADE,
  vessel_id uuid NOT NULL,
  key_id text NOT NULL,
  -- 12-octet nonce, ciphertext, 16-octet tag; null once purged
  sealed bytea,
  -- keyed fingerprint: finds reuse on the same vessel without opening anything
  fingerprint bytea NOT NULL,
  -- random nonces of one key must stay below 2^32 uses (NIST SP 800-38D section 8.3)
  seal_number bigint NOT NULL DEFAULT nextval('vault_seals') CHECK (seal_number < 4294967296),
  UNIQUE (vessel_id, fingerprint)
);

CREATE TABLE rotations (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  network_id uuid NOT NULL REFERENCES networks(id) ON DELETE CASCADE,
  state text NOT NULL CHECK (state IN ('planned','staged','handed_out','applying','unknown',
    'needs_somebody','reconciling','live','drifted','retired','cancelled','superseded')),
  mode text NOT NULL DEFAULT 'graceful' CHECK (mode IN ('graceful','urgent')),
  driver text NOT NULL CHECK (driver IN ('by_hand','rehearsal')),
  epoch integer NOT NULL,
  -- fencing number, given when staged
  ticket bigint,
  from_passphrase_id uuid REFERENCES passphrases(id),
  to_passphrase_id uuid REFERENCES passphrases(id),
  planned_by text NOT NULL CHECK (planned_by IN ('plan','person')),
  planned_by_person uuid REFERENCES people(id) ON DELETE SET NULL,
  -- codes from shared/rules/planning with their figures
  reasons jsonb NOT NULL DEFAULT '[]',
  -- when it is meant to happen
  due_at timestamptz NOT NULL,
  -- the network's age limit or an event's own limit
  deadline_at timestamptz,
  -- (network, rule, ship's local time, zone): the same occurrence is never claimed twice
  occurrence text,
  staged_at timestamptz,
  handed_out_at timestamptz,
  applying_at timestamptz,
  -- after this without a report the state is unknown
  report_by timestamptz,
  live_at timestamptz,
  ended_at timestamptz,
  -- why it needs somebody, or who waived the disclosure rule
  detail text,
  waived_by uuid REFERENCES people(id) ON DELETE SET NULL,
  created_at timestamptz NOT NULL,
  updated_at timestamptz NOT NULL
);
CREATE UNIQUE INDEX rotations_one_open ON rotations(network_id)
  WHERE state IN ('planned','staged','handed_out','applying','unknown','needs_somebody','reconciling');
CREATE UNIQUE INDEX rotations_one_live ON rotations(network_id) WHERE state IN ('live','drifted');
CREATE UNIQUE INDEX rotations_ticket ON rotations(network_id, epoch, ticket) WHERE ticket IS NOT NULL;
CREATE UNIQUE INDEX rotations_occurrence ON rotations(network_id, occurrence) WHERE occurrence IS NOT NULL;
CREATE INDEX rotations_due ON rotations(due_at) WHERE state IN ('planned','staged');
CREATE INDEX rotations_report ON rotations(report_by) WHERE state IN ('handed_out','applying');
CREATE INDEX rotations_vessel ON rotations(vessel_id, created_at DESC);

CREATE TABLE rotation_steps (
  from_state text NOT NULL,
  to_state text NOT NULL,
  PRIMARY KEY (from_state, to_state)
);
INSERT INTO rotation_steps VALUES
  ('planned','staged'),('planned','cancelled'),
  ('staged','handed_out'),('staged','cancelled'),('staged','needs_somebody'),
  ('handed_out','applying'),('handed_out','unknown'),('handed_out','needs_somebody'),
  ('handed_out','superseded'),('handed_out','reconciling'),
  ('applying','live'),('applying','unknown'),('applying','needs_somebody'),('applying','superseded'),
  ('applying','reconciling'),
  ('unknown','handed_out'),('unknown','applying'),('unknown','live'),('unknown','needs_somebody'),
  ('unknown','superseded'),('unknown','reconciling'),
  ('needs_somebody','handed_out'),('needs_somebody','applying'),('needs_somebody','live'),
  ('needs_somebody','unknown'),('needs_somebody','superseded'),('needs_somebody','reconciling'),
  ('live','drifted'),('live','retired'),('live','reconciling'),
  ('drifted','live'),('drifted','retired'),('drifted','reconciling'),
  ('reconciling','handed_out'),('reconciling','live'),('reconciling','superseded'),('reconciling','retired');

CREATE FUNCTION rotation_step_allowed() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF NEW.state <> OLD.state AND NOT EXISTS (
    SELECT 1 FROM rotation_steps s WHERE s.from_state = OLD.state AND s.to_state = NEW.state) THEN
    RAISE EXCEPTION 'a rotation may not go from % to %', OLD.state, NEW.state USING ERRCODE = 'check_violation';
  END IF;
  IF OLD.ticket IS NOT NULL AND NEW.ticket IS DISTINCT FROM OLD.ticket THEN
    RAISE EXCEPTION 'a ticket number never changes' USING ERRCODE = 'check_violation';
  END IF;
  IF OLD.to_passphrase_id IS NOT NULL AND NEW.to_passphrase_id IS DISTINCT FROM OLD.to_passphrase_id THEN
    RAISE EXCEPTION 'a ticket keeps its passphrase' USING ERRCODE = 'check_violation';
  END IF;
  RETURN NEW;
END $$;
CREATE TRIGGER rotation_step BEFORE UPDATE ON rotations FOR EACH ROW EXECUTE FUNCTION rotation_step_allowed();

-- The access points a ticket was frozen for, and the outcome on each.
CREATE TABLE rotation_targets (
  rotation_id uuid NOT NULL REFERENCES rotations(id) ON DELETE CASCADE,
  access_point_id uuid NOT NULL REFERENCES access_points(id),
  vessel_id uuid NOT NULL,
  -- what was last seen on it under this ticket
  seen text CHECK (seen IN ('new','old','other','unreachable')),
  -- E0 sent, E1 read back, E2 real association or a person's typed-back passphrase
  evidence text CHECK (evidence IN ('E0','E1','E2')),
  seen_at timestamptz,
  seen_by uuid REFERENCES people(id) ON DELETE SET NULL,
  PRIMARY KEY (rotation_id, access_point_id)
);

CREATE TABLE observations (
  id uuid PRIMARY KEY,
  rotation_id uuid NOT NULL REFERENCES rotations(id) ON DELETE CASCADE,
  access_point_id uuid NOT NULL REFERENCES access_points(id),
  vessel_id uuid NOT NULL,
  epoch integer NOT NULL,
  ticket bigint NOT NULL,
  seen text NOT NULL CHECK (seen IN ('new','old','other','unreachable')),
  evidence text NOT NULL CHECK (evidence IN ('E0','E1','E2')),
  -- (reporter, boot, sequence) makes a repeated report harmless
  reporter text NOT NULL,
  boot text NOT NULL,
  sequence bigint NOT NULL,
  at timestamptz NOT NULL,
  UNIQUE (vessel_id, reporter, boot, sequence)
);
CREATE INDEX observations_rotation ON observations(rotation_id, at);

-- Independent ways aboard to learn the new passphrase, confirmed before a planned cut-over (guard: D1).
CREATE TABLE rotation_ways (
  rotation_id uuid NOT NULL REFERENCES rotations(id) ON DELETE CASCADE,
  vessel_id uuid NOT NULL,
  way text NOT NULL CHECK (way IN ('journal','card','officer','kiosk')),
  at timestamptz NOT NULL,
  PRIMARY KEY (rotation_id, way)
);

-- What the rehearsal's pretended access points run now.
CREATE TABLE rehearsal_access_points (
  access_point_id uuid NOT NULL REFERENCES access_points(id) ON DELETE CASCADE,
  network_id uuid NOT NULL REFERENCES networks(id) ON DELETE CASCADE,
  vessel_id uuid NOT NULL,
  passphrase_id uuid NOT NULL REFERENCES passphrases(id),
  silent boolean NOT NULL DEFAULT false,
  PRIMARY KEY (access_point_id, network_id)
);
`,
};
