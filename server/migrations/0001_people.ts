import type { Migration } from '../db/migration.ts';

/** People, dealers, vessels and who belongs where. */
export const migration: Migration = {
  name: '0001_people',
  sql: `
CREATE EXTENSION IF NOT EXISTS citext;
CREATE EXTENSION IF NOT EXISTS pg_trgm;
CREATE EXTENSION IF NOT EXISTS btree_gin;

CREATE TABLE dealers (
  id uuid PRIMARY KEY,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  second_factor_roles text[] NOT NULL DEFAULT '{service_desk}',
  created_at timestamptz NOT NULL
);

CREATE TABLE vessels (
  id uuid PRIMARY KEY,
  dealer_id uuid REFERENCES dealers(id),
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  kind text NOT NULL DEFAULT 'motor yacht' CHECK (length(kind) <= 60),
  length_m numeric(6,1) CHECK (length_m > 0),
  guests_max integer CHECK (guests_max BETWEEN 0 AND 500),
  home_port text CHECK (length(home_port) <= 120),
  owner_name text CHECK (length(owner_name) <= 120),
  lying text CHECK (length(lying) <= 120),
  source text NOT NULL DEFAULT 'dock' CHECK (source IN ('dock','cellular','satellite')),
  retention_days integer NOT NULL DEFAULT 90 CHECK (retention_days BETWEEN 1 AND 3650),
  second_factor_roles text[] NOT NULL DEFAULT '{captain}',
  driver text NOT NULL DEFAULT 'by_hand' CHECK (driver IN ('by_hand','rehearsal')),
  serial_prefix text NOT NULL DEFAULT 'M' CHECK (serial_prefix ~ '^[A-Z]{1,3}$'),
  last_serial integer NOT NULL DEFAULT 1000,
  -- changes only on a restore from backup (guard: epoch)
  epoch integer NOT NULL DEFAULT 1,
  last_heard_at timestamptz,
  demo boolean NOT NULL DEFAULT false,
  created_at timestamptz NOT NULL,
  updated_at timestamptz NOT NULL
);
CREATE INDEX vessels_dealer ON vessels(dealer_id, name);

-- Ship's time: the zone in force from an instant on, until the next row's instant.
CREATE TABLE ship_zones (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  zone text NOT NULL CHECK (length(zone) <= 64),
  from_at timestamptz NOT NULL,
  UNIQUE (vessel_id, from_at)
);

CREATE TABLE cabins (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  deck text NOT NULL CHECK (length(deck) BETWEEN 1 AND 60),
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 60),
  position integer NOT NULL DEFAULT 0,
  UNIQUE (vessel_id, name)
);

CREATE TABLE people (
  id uuid PRIMARY KEY,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  email citext NOT NULL UNIQUE CHECK (length(email) <= 254),
  locale text NOT NULL DEFAULT 'en',
  password_hash text,
  totp_secret bytea,
  totp_key_id text,
  totp_enrolled_at timestamptz,
  -- last accepted 30 s step, so a code works once (RFC 6238 section 5.2)
  totp_last_step bigint NOT NULL DEFAULT 0,
  disabled_at timestamptz,
  demo boolean NOT NULL DEFAULT false,
  created_at timestamptz NOT NULL,
  updated_at timestamptz NOT NULL
);

CREATE TABLE recovery_codes (
  id uuid PRIMARY KEY,
  person_id uuid NOT NULL REFERENCES people(id) ON DELETE CASCADE,
  code_hash bytea NOT NULL,
  used_at timestamptz
);
CREATE INDEX recovery_codes_person ON recovery_codes(person_id);

-- One row per person, vessel and role. Ended rows stay for the record.
CREATE TABLE memberships (
  id uuid PRIMARY KEY,
  person_id uuid NOT NULL REFERENCES people(id) ON DELETE CASCADE,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  role text NOT NULL CHECK (role IN ('captain','chief_stew','purser','eto','crew','owner_keeper')),
  given_by uuid REFERENCES people(id) ON DELETE SET NULL,
  given_at timestamptz NOT NULL,
  suspended_at timestamptz,
  ends_at timestamptz,
  ended_at timestamptz
);
CREATE UNIQUE INDEX memberships_one ON memberships(person_id, vessel_id, role) WHERE ended_at IS NULL;
CREATE INDEX memberships_vessel ON memberships(vessel_id) WHERE ended_at IS NULL;

CREATE TABLE dealer_members (
  id uuid PRIMARY KEY,
  person_id uuid NOT NULL REFERENCES people(id) ON DELETE CASCADE,
  dealer_id uuid NOT NULL REFERENCES dealers(id) ON DELETE CASCADE,
  role text NOT NULL CHECK (role IN ('service_desk')),
  given_at timestamptz NOT NULL,
  suspended_at timestamptz,
  ended_at timestamptz
);
CREATE UNIQUE INDEX dealer_members_one ON dealer_members(person_id) WHERE ended_at IS NULL;

CREATE TABLE sessions (
  -- SHA-256 of the random id that the cookie's token names
  id_hash bytea PRIMARY KEY,
  -- what the account page calls it by; useless for signing in
  public_id uuid NOT NULL UNIQUE,
  person_id uuid NOT NULL REFERENCES people(id) ON DELETE CASCADE,
  label text NOT NULL CHECK (length(label) <= 120),
  created_at timestamptz NOT NULL,
  last_seen_at timestamptz NOT NULL,
  -- absolute end; the idle limit is counted from last_seen_at
  expires_at timestamptz NOT NULL,
  proved_at timestamptz NOT NULL,
  second_factor_at timestamptz,
  ended_at timestamptz
);
CREATE INDEX sessions_person ON sessions(person_id) WHERE ended_at IS NULL;

-- A browser that has signed in before: lets the real person in while guesses are throttled.
CREATE TABLE known_devices (
  id uuid PRIMARY KEY,
  person_id uuid NOT NULL REFERENCES people(id) ON DELETE CASCADE,
  token_hash bytea NOT NULL UNIQUE,
  label text NOT NULL,
  created_at timestamptz NOT NULL,
  last_used_at timestamptz NOT NULL
);
CREATE INDEX known_devices_person ON known_devices(person_id);

CREATE TABLE invitations (
  id uuid PRIMARY KEY,
  token_hash bytea NOT NULL UNIQUE,
  email citext NOT NULL,
  name text,
  vessel_id uuid REFERENCES vessels(id) ON DELETE CASCADE,
  dealer_id uuid REFERENCES dealers(id) ON DELETE CASCADE,
  roles text[] NOT NULL,
  invited_by uuid NOT NULL REFERENCES people(id) ON DELETE CASCADE,
  created_at timestamptz NOT NULL,
  expires_at timestamptz NOT NULL,
  accepted_at timestamptz,
  revoked_at timestamptz,
  CHECK (num_nonnulls(vessel_id, dealer_id) = 1)
);
CREATE INDEX invitations_vessel ON invitations(vessel_id);

CREATE TABLE password_resets (
  id uuid PRIMARY KEY,
  person_id uuid NOT NULL REFERENCES people(id) ON DELETE CASCADE,
  token_hash bytea NOT NULL UNIQUE,
  created_at timestamptz NOT NULL,
  expires_at timestamptz NOT NULL,
  used_at timestamptz
);
CREATE INDEX password_resets_person ON password_resets(person_id);

-- Counts of failures by account, address and all together; shared by every server.
CREATE TABLE throttles (
  key text PRIMARY KEY,
  failures integer NOT NULL,
  window_from timestamptz NOT NULL,
  blocked_until timestamptz
);

CREATE TABLE idempotency_keys (
  person_id uuid NOT NULL REFERENCES people(id) ON DELETE CASCADE,
  route text NOT NULL,
  key text NOT NULL CHECK (length(key) BETWEEN 8 AND 100),
  vessel_id uuid,
  body_hash bytea NOT NULL,
  status integer,
  response jsonb,
  created_at timestamptz NOT NULL,
  PRIMARY KEY (person_id, route, key)
);
CREATE INDEX idempotency_keys_age ON idempotency_keys(created_at);

-- For which roles a vessel asks a second factor; needed before a request's scope is known.
CREATE FUNCTION vessel_second_factor_roles(vessel uuid) RETURNS text[]
  LANGUAGE sql STABLE SECURITY DEFINER SET search_path = public, pg_temp AS
  $$ SELECT second_factor_roles FROM vessels WHERE id = vessel $$;

-- One row about this installation.
CREATE TABLE installation (
  sole boolean PRIMARY KEY DEFAULT true CHECK (sole),
  -- proof that the process holds the key the rows were sealed with: a known text sealed by it
  key_checks jsonb NOT NULL DEFAULT '{}',
  demo_laid_at timestamptz,
  created_at timestamptz NOT NULL DEFAULT now()
);
INSERT INTO installation DEFAULT VALUES;
`,
};
