import type { Migration } from '../db/migration.ts';

/** The calendar, parties and guests, crew, cards, holders, and the log. */
export const migration: Migration = {
  name: '0003_people_aboard',
  sql: `
CREATE TABLE voyages (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  kind text NOT NULL CHECK (kind IN ('charter','owner_trip','crossing','yard')),
  title text NOT NULL CHECK (length(title) BETWEEN 1 AND 120),
  starts_at timestamptz NOT NULL,
  ends_at timestamptz NOT NULL,
  from_port text CHECK (length(from_port) <= 120),
  to_port text CHECK (length(to_port) <= 120),
  created_at timestamptz NOT NULL,
  updated_at timestamptz NOT NULL,
  CHECK (ends_at > starts_at)
);
CREATE INDEX voyages_vessel ON voyages(vessel_id, starts_at);

CREATE TABLE parties (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  voyage_id uuid REFERENCES voyages(id) ON DELETE SET NULL,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  arrives_at timestamptz NOT NULL,
  leaves_at timestamptz NOT NULL,
  ashore_at timestamptz,
  created_at timestamptz NOT NULL,
  updated_at timestamptz NOT NULL,
  CHECK (leaves_at > arrives_at)
);
CREATE INDEX parties_vessel ON parties(vessel_id, arrives_at DESC);

CREATE TABLE guests (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  -- null for a visitor: someone not on the list
  party_id uuid REFERENCES parties(id) ON DELETE CASCADE,
  cabin_id uuid REFERENCES cabins(id) ON DELETE SET NULL,
  -- null when withheld or erased; the label ("Guest 8") is always there
  name text CHECK (length(name) <= 120),
  label text NOT NULL CHECK (length(label) BETWEEN 1 AND 60),
  language text NOT NULL DEFAULT 'en',
  under_16 boolean NOT NULL DEFAULT false,
  from_at timestamptz NOT NULL,
  until_at timestamptz NOT NULL,
  ashore_at timestamptz,
  position integer NOT NULL DEFAULT 0,
  erased_at timestamptz,
  created_at timestamptz NOT NULL,
  updated_at timestamptz NOT NULL,
  CHECK (until_at > from_at)
);
CREATE INDEX guests_party ON guests(party_id);
CREATE INDEX guests_vessel ON guests(vessel_id, until_at DESC);

CREATE TABLE crew_members (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  person_id uuid REFERENCES people(id) ON DELETE SET NULL,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  position text NOT NULL CHECK (length(position) <= 60),
  department text NOT NULL DEFAULT '' CHECK (length(department) <= 60),
  email citext CHECK (length(email) <= 254),
  language text NOT NULL DEFAULT 'en',
  signed_on_at timestamptz NOT NULL,
  signed_off_at timestamptz,
  created_at timestamptz NOT NULL,
  updated_at timestamptz NOT NULL
);
CREATE INDEX crew_vessel ON crew_members(vessel_id);
CREATE UNIQUE INDEX crew_person ON crew_members(vessel_id, person_id) WHERE person_id IS NOT NULL AND signed_off_at IS NULL;

CREATE TABLE cards (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  network_id uuid NOT NULL REFERENCES networks(id) ON DELETE CASCADE,
  passphrase_id uuid NOT NULL REFERENCES passphrases(id),
  serial text NOT NULL CHECK (serial ~ '^[A-Z]{1,3}-[0-9]{4,8}$'),
  format text NOT NULL CHECK (format IN ('wallet','cabin')),
  language text NOT NULL,
  -- who it was printed for, if anyone
  guest_id uuid REFERENCES guests(id) ON DELETE SET NULL,
  crew_member_id uuid REFERENCES crew_members(id) ON DELETE SET NULL,
  state text NOT NULL CHECK (state IN ('printed','handed_over','returned','lost','void')),
  printed_at timestamptz NOT NULL,
  printed_by uuid REFERENCES people(id) ON DELETE SET NULL,
  handed_over_at timestamptz,
  ended_at timestamptz,
  UNIQUE (vessel_id, serial)
);
CREATE INDEX cards_passphrase ON cards(passphrase_id);
CREATE INDEX cards_guest ON cards(guest_id) WHERE guest_id IS NOT NULL;

-- Who was given which passphrase: the receipt. One row per person, passphrase, channel and card.
CREATE TABLE handovers (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  network_id uuid NOT NULL REFERENCES networks(id) ON DELETE CASCADE,
  passphrase_id uuid NOT NULL REFERENCES passphrases(id),
  holder_kind text NOT NULL CHECK (holder_kind IN ('guest','crew','person')),
  holder_id uuid NOT NULL,
  channel text NOT NULL CHECK (channel IN ('card','screen','own_page','reveal','entry_sheet','typed')),
  card_id uuid REFERENCES cards(id),
  by_person uuid REFERENCES people(id) ON DELETE SET NULL,
  at timestamptz NOT NULL,
  undone_at timestamptz
);
CREATE UNIQUE INDEX handovers_once ON handovers(holder_id, passphrase_id, channel, card_id) NULLS NOT DISTINCT
  WHERE undone_at IS NULL;
CREATE INDEX handovers_passphrase ON handovers(passphrase_id);
CREATE INDEX handovers_vessel ON handovers(vessel_id, at DESC);

-- Who knows which passphrase, kept in the transactions that hand over, undo and mark ashore.
CREATE TABLE holders (
  passphrase_id uuid NOT NULL REFERENCES passphrases(id) ON DELETE CASCADE,
  holder_kind text NOT NULL CHECK (holder_kind IN ('guest','crew','person')),
  holder_id uuid NOT NULL,
  vessel_id uuid NOT NULL,
  network_id uuid NOT NULL,
  since timestamptz NOT NULL,
  through text NOT NULL,
  departed_at timestamptz,
  PRIMARY KEY (passphrase_id, holder_kind, holder_id)
);
CREATE INDEX holders_departed ON holders(passphrase_id) WHERE departed_at IS NOT NULL;
CREATE INDEX holders_person ON holders(vessel_id, holder_kind, holder_id);

-- What exposes a passphrase besides a departed holder: a lost card or a reported leak.
CREATE TABLE leaks (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id) ON DELETE CASCADE,
  network_id uuid NOT NULL REFERENCES networks(id) ON DELETE CASCADE,
  passphrase_id uuid NOT NULL REFERENCES passphrases(id),
  kind text NOT NULL CHECK (kind IN ('lost_card','reported')),
  card_id uuid REFERENCES cards(id),
  note text CHECK (length(note) <= 500),
  at timestamptz NOT NULL,
  by_person uuid REFERENCES people(id) ON DELETE SET NULL,
  withdrawn_at timestamptz
);
CREATE INDEX leaks_passphrase ON leaks(passphrase_id) WHERE withdrawn_at IS NULL;

CREATE TABLE log_heads (
  vessel_id uuid PRIMARY KEY REFERENCES vessels(id),
  seq bigint NOT NULL DEFAULT 0,
  hash bytea NOT NULL
);

-- Append-only and chained: each hash covers the one before. Names lie apart in log_names.
CREATE TABLE log_entries (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id),
  seq bigint NOT NULL,
  at timestamptz NOT NULL,
  kind text NOT NULL,
  network_id uuid,
  passphrase_id uuid,
  -- the person it is about, if any
  subject_kind text CHECK (subject_kind IN ('guest','crew','person','card','rotation','access_point')),
  subject_id uuid,
  actor_id uuid,
  -- facts without names or secrets; canonical JSON (RFC 8785) is what the hash covers
  body jsonb NOT NULL,
  prev_hash bytea NOT NULL,
  hash bytea NOT NULL,
  UNIQUE (vessel_id, seq),
  UNIQUE (vessel_id, prev_hash)
);
CREATE INDEX log_entries_page ON log_entries(vessel_id, at DESC, seq DESC);
CREATE INDEX log_entries_network ON log_entries(network_id, seq DESC) WHERE network_id IS NOT NULL;

-- A name in an entry is committed there by a salted hash; erasing this row leaves the chain valid.
CREATE TABLE log_names (
  entry_id uuid NOT NULL REFERENCES log_entries(id),
  role text NOT NULL CHECK (role IN ('subject','actor','by')),
  vessel_id uuid NOT NULL,
  salt bytea NOT NULL,
  name text NOT NULL,
  PRIMARY KEY (entry_id, role)
);
CREATE INDEX log_names_search ON log_names USING gin (vessel_id, name gin_trgm_ops);

CREATE FUNCTION log_refuses() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  RAISE EXCEPTION 'the log is append-only' USING ERRCODE = 'insufficient_privilege';
END $$;
CREATE TRIGGER log_entries_fixed BEFORE UPDATE OR DELETE ON log_entries FOR EACH ROW EXECUTE FUNCTION log_refuses();
CREATE TRIGGER log_entries_kept BEFORE TRUNCATE ON log_entries EXECUTE FUNCTION log_refuses();

-- Signed heads kept for comparison; a copy also goes to a file outside the database.
CREATE TABLE log_checkpoints (
  id uuid PRIMARY KEY,
  vessel_id uuid NOT NULL REFERENCES vessels(id),
  seq bigint NOT NULL,
  hash bytea NOT NULL,
  signature bytea NOT NULL,
  at timestamptz NOT NULL
);

CREATE TABLE mail_outbox (
  id uuid PRIMARY KEY,
  vessel_id uuid,
  kind text NOT NULL,
  recipient text NOT NULL,
  -- (kind, subject, recipient): a repeat carries the same Message-ID and is sent once
  message_key text NOT NULL UNIQUE,
  -- what the message function needs; one-time tokens lie sealed
  data jsonb NOT NULL,
  sealed bytea,
  key_id text,
  tries integer NOT NULL DEFAULT 0,
  next_try_at timestamptz NOT NULL,
  sent_at timestamptz,
  given_up_at timestamptz,
  last_error text,
  created_at timestamptz NOT NULL
);
CREATE INDEX mail_outbox_due ON mail_outbox(next_try_at) WHERE sent_at IS NULL AND given_up_at IS NULL;
`,
};
