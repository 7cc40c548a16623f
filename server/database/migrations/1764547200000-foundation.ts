import type { MigrationInterface, QueryRunner } from 'typeorm';

/**
 * The first schema. Rules that every later migration follows too:
 * - a table that belongs to a station starts its key with station_id: the filter of every query now and
 *   the shard key later; foreign keys carry the station, so that a row can never point into another one;
 * - times are timestamptz in UTC, ranges are half-open, units stand in the column's name;
 * - migrations are append-only: expand first, contract in a later release.
 */
export class Foundation1764547200000 implements MigrationInterface {
  async up(queryRunner: QueryRunner): Promise<void> {
    for (const statements of [people, station, switchLog, spots, imports, jobs, units, questions, records]) {
      await queryRunner.query(statements);
    }
  }

  async down(): Promise<void> {
    throw new Error('The foundation cannot be taken down: restore a backup instead.');
  }
}

const people = `
CREATE EXTENSION IF NOT EXISTS btree_gist;

CREATE TABLE app_user (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  email text NOT NULL,
  name text NOT NULL,
  password_hash text NOT NULL,
  length_unit text NOT NULL DEFAULT 'm' CHECK (length_unit IN ('m', 'ft')),
  theme text NOT NULL DEFAULT 'system' CHECK (theme IN ('system', 'dark', 'light')),
  created_at timestamptz NOT NULL DEFAULT now(),
  password_changed_at timestamptz NOT NULL DEFAULT now(),
  disabled_at timestamptz,
  CHECK (email = lower(email))
);
CREATE UNIQUE INDEX app_user_email ON app_user (email);

-- One row a signed-in browser: the family of its rotating refresh tokens.
CREATE TABLE session (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  user_id uuid NOT NULL REFERENCES app_user (id) ON DELETE CASCADE,
  user_agent text NOT NULL DEFAULT '',
  created_at timestamptz NOT NULL DEFAULT now(),
  last_used_at timestamptz NOT NULL DEFAULT now(),
  expires_at timestamptz NOT NULL,
  revoked_at timestamptz,
  revoked_reason text
);
CREATE INDEX session_by_user ON session (user_id);

-- Only the SHA-256 of a token is kept. A used token that comes back revokes its whole session.
CREATE TABLE refresh_token (
  token_hash bytea PRIMARY KEY,
  session_id uuid NOT NULL REFERENCES session (id) ON DELETE CASCADE,
  issued_at timestamptz NOT NULL DEFAULT now(),
  expires_at timestamptz NOT NULL,
  used_at timestamptz
);
CREATE INDEX refresh_token_session ON refresh_token (session_id);

CREATE TABLE password_reset (
  token_hash bytea PRIMARY KEY,
  user_id uuid NOT NULL REFERENCES app_user (id) ON DELETE CASCADE,
  created_at timestamptz NOT NULL DEFAULT now(),
  expires_at timestamptz NOT NULL,
  used_at timestamptz
);

-- Counters of the rate limiter, shared by all server processes (layout fixed by rate-limiter-flexible).
CREATE TABLE rate_limit (
  key varchar(255) PRIMARY KEY,
  points integer NOT NULL DEFAULT 0,
  expire bigint
);
`;

const station = `
CREATE TABLE station (
  id integer GENERATED ALWAYS AS IDENTITY PRIMARY KEY,
  name text NOT NULL,
  call_sign text NOT NULL,
  locator text NOT NULL,
  latitude_deg double precision NOT NULL CHECK (latitude_deg BETWEEN -90 AND 90),
  longitude_deg double precision NOT NULL CHECK (longitude_deg BETWEEN -180 AND 180),
  time_zone text NOT NULL,
  itu_region smallint NOT NULL CHECK (itu_region BETWEEN 1 AND 3),
  guard_seconds smallint NOT NULL DEFAULT 20 CHECK (guard_seconds BETWEEN 0 AND 600),
  block_minutes smallint NOT NULL DEFAULT 15 CHECK (block_minutes IN (5, 10, 15, 20, 30, 60)),
  window_seconds smallint NOT NULL DEFAULT 30 CHECK (window_seconds BETWEEN 1 AND 300),
  freq_tolerance_100hz smallint NOT NULL DEFAULT 3 CHECK (freq_tolerance_100hz BETWEEN 0 AND 50),
  margin_db real NOT NULL DEFAULT 1 CHECK (margin_db > 0 AND margin_db <= 20),
  sector_count smallint NOT NULL DEFAULT 12 CHECK (sector_count IN (4, 6, 8, 12, 16, 18, 24, 36)),
  is_demo boolean NOT NULL DEFAULT false,
  created_at timestamptz NOT NULL DEFAULT now()
);

CREATE TABLE membership (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  user_id uuid NOT NULL REFERENCES app_user (id) ON DELETE CASCADE,
  role text NOT NULL CHECK (role IN ('manager', 'operator', 'analyst', 'contester')),
  created_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, user_id)
);
CREATE INDEX membership_user ON membership (user_id);

CREATE TABLE invitation (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id uuid NOT NULL DEFAULT gen_random_uuid(),
  email text NOT NULL CHECK (email = lower(email)),
  role text NOT NULL CHECK (role IN ('manager', 'operator', 'analyst', 'contester')),
  token_hash bytea NOT NULL,
  invited_by uuid REFERENCES app_user (id) ON DELETE SET NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  expires_at timestamptz NOT NULL,
  accepted_at timestamptz,
  withdrawn_at timestamptz,
  PRIMARY KEY (station_id, id)
);
CREATE UNIQUE INDEX invitation_token ON invitation (token_hash);

CREATE TABLE api_token (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id uuid NOT NULL DEFAULT gen_random_uuid(),
  name text NOT NULL,
  token_hash bytea NOT NULL,
  scopes text[] NOT NULL,
  created_by uuid REFERENCES app_user (id) ON DELETE SET NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  expires_at timestamptz NOT NULL,
  last_used_at timestamptz,
  revoked_at timestamptz,
  PRIMARY KEY (station_id, id)
);
CREATE UNIQUE INDEX api_token_hash ON api_token (token_hash);

CREATE TABLE receiver (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id integer GENERATED ALWAYS AS IDENTITY,
  call_sign text NOT NULL,
  label text NOT NULL,
  notes text NOT NULL DEFAULT '',
  created_at timestamptz NOT NULL DEFAULT now(),
  retired_at timestamptz,
  PRIMARY KEY (station_id, id)
);
CREATE UNIQUE INDEX receiver_call_sign ON receiver (station_id, call_sign);

CREATE TABLE antenna (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id integer GENERATED ALWAYS AS IDENTITY,
  name text NOT NULL,
  marker text NOT NULL,
  kind text NOT NULL CHECK (kind IN ('long wire', 'loop', 'vertical', 'phased pair', 'dipole', 'other')),
  heading_deg real CHECK (heading_deg >= 0 AND heading_deg < 360),
  beamwidth_deg real CHECK (beamwidth_deg > 0 AND beamwidth_deg <= 360),
  length_m real CHECK (length_m > 0),
  height_m real CHECK (height_m >= 0),
  notes text NOT NULL DEFAULT '',
  in_service_from date,
  in_service_to date,
  created_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, id),
  CHECK (in_service_to IS NULL OR in_service_from IS NULL OR in_service_to >= in_service_from)
);
CREATE UNIQUE INDEX antenna_name ON antenna (station_id, lower(name));

CREATE TABLE feed (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id integer GENERATED ALWAYS AS IDENTITY,
  name text NOT NULL,
  host text NOT NULL,
  port integer NOT NULL CHECK (port BETWEEN 1 AND 65535),
  login_call text NOT NULL,
  enabled boolean NOT NULL DEFAULT true,
  created_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, id)
);

-- Written by the worker only; what a person sees of the feed's health.
CREATE TABLE feed_health (
  station_id integer NOT NULL,
  feed_id integer NOT NULL,
  state text NOT NULL CHECK (state IN ('connecting', 'receiving', 'silent', 'lost', 'off')),
  connected_at timestamptz,
  last_line_at timestamptz,
  lines_last_minute integer NOT NULL DEFAULT 0,
  lines_total bigint NOT NULL DEFAULT 0,
  stored_total bigint NOT NULL DEFAULT 0,
  doubled_total bigint NOT NULL DEFAULT 0,
  refused_total bigint NOT NULL DEFAULT 0,
  other_receiver_total bigint NOT NULL DEFAULT 0,
  last_error text,
  updated_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, feed_id),
  FOREIGN KEY (station_id, feed_id) REFERENCES feed (station_id, id) ON DELETE CASCADE
);

CREATE TABLE feed_refusal (
  station_id integer NOT NULL,
  feed_id integer NOT NULL,
  id bigint GENERATED ALWAYS AS IDENTITY,
  received_at timestamptz NOT NULL,
  reason text NOT NULL,
  raw text NOT NULL,
  PRIMARY KEY (station_id, feed_id, id),
  FOREIGN KEY (station_id, feed_id) REFERENCES feed (station_id, id) ON DELETE CASCADE
);
`;

const switchLog = `
-- Two antennas at once on one receiver cannot be stored, not even by two requests in the same instant.
CREATE TABLE dwell (
  station_id integer NOT NULL,
  id bigint GENERATED ALWAYS AS IDENTITY,
  receiver_id integer NOT NULL,
  antenna_id integer NOT NULL,
  starts_at timestamptz NOT NULL,
  ends_at timestamptz,
  during tstzrange NOT NULL GENERATED ALWAYS AS (tstzrange(starts_at, ends_at, '[)')) STORED,
  source text NOT NULL CHECK (source IN ('hand', 'import', 'token', 'plan')),
  note text NOT NULL DEFAULT '',
  import_id integer,
  created_by uuid REFERENCES app_user (id) ON DELETE SET NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, id),
  FOREIGN KEY (station_id, receiver_id) REFERENCES receiver (station_id, id),
  FOREIGN KEY (station_id, antenna_id) REFERENCES antenna (station_id, id),
  CONSTRAINT dwell_order CHECK (ends_at IS NULL OR ends_at > starts_at),
  CONSTRAINT dwell_no_overlap EXCLUDE USING gist (station_id WITH =, receiver_id WITH =, during WITH &&)
);
CREATE INDEX dwell_start ON dwell (station_id, starts_at);

-- Who changed what, when; before and after as they were. Undo reads it.
CREATE TABLE dwell_change (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id bigint GENERATED ALWAYS AS IDENTITY,
  batch_id uuid NOT NULL,
  dwell_id bigint NOT NULL,
  action text NOT NULL CHECK (action IN ('add', 'edit', 'split', 'close', 'delete', 'import', 'undo')),
  before jsonb,
  after jsonb,
  user_id uuid REFERENCES app_user (id) ON DELETE SET NULL,
  token_id uuid,
  at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, id)
);
CREATE INDEX dwell_change_batch ON dwell_change (station_id, batch_id);
`;

const spots = `
-- The dictionary of call signs as heard; the same for all stations, written once per call.
CREATE TABLE call_sign (
  id integer GENERATED ALWAYS AS IDENTITY PRIMARY KEY,
  call text COLLATE "C" NOT NULL
);
CREATE UNIQUE INDEX call_sign_call ON call_sign (call);

-- Where a station believes a call to be, seen from its own antennas. A cache of shared/radio plus the
-- station's own corrections; azimuth is null when there is no bearing (maritime and aeronautical mobile).
CREATE TABLE call_bearing (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  call_id integer NOT NULL REFERENCES call_sign (id),
  country text,
  source text NOT NULL CHECK (source IN ('locator', 'call area', 'country', 'none')),
  latitude_deg real,
  longitude_deg real,
  radius_km real,
  azimuth_deg real,
  distance_km real,
  spread_deg real,
  PRIMARY KEY (station_id, call_id)
);

CREATE TABLE position_override (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id integer GENERATED ALWAYS AS IDENTITY,
  matches text NOT NULL CHECK (matches IN ('call', 'prefix')),
  pattern text NOT NULL,
  locator text NOT NULL,
  radius_km real NOT NULL DEFAULT 50 CHECK (radius_km >= 0 AND radius_km <= 10000),
  created_by uuid REFERENCES app_user (id) ON DELETE SET NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, id)
);
CREATE UNIQUE INDEX position_override_pattern ON position_override (station_id, matches, pattern);

-- Narrow on purpose: integers only. heard_at holds the whole second (a spot equal in receiver, second,
-- call and frequency is the same spot), heard_ms the rest. import_id 0 = heard live.
-- The antenna is not here: it is derived from the switch log (view tagged_spot).
CREATE TABLE spot (
  heard_at timestamptz NOT NULL,
  station_id integer NOT NULL,
  receiver_id integer NOT NULL,
  call_id integer NOT NULL,
  freq_100hz integer NOT NULL,
  import_id integer NOT NULL,
  heard_ms smallint NOT NULL CHECK (heard_ms BETWEEN 0 AND 999),
  band_m smallint NOT NULL,
  snr_db smallint NOT NULL,
  speed_wpm smallint,
  mode smallint NOT NULL,
  uncertainty_s smallint NOT NULL,
  feed_minute smallint CHECK (feed_minute BETWEEN 0 AND 1439),
  UNIQUE (station_id, heard_at, receiver_id, call_id, freq_100hz)
) PARTITION BY RANGE (heard_at);

-- Makes the month partitions that a range of spots needs; safe to call from two workers at once.
-- Made first and attached then: CREATE TABLE ... PARTITION OF would lock out every reader and writer of
-- spot, and wait behind the longest running question; ATTACH lets both go on.
CREATE FUNCTION ensure_spot_partitions(from_time timestamptz, to_time timestamptz) RETURNS integer
LANGUAGE plpgsql AS $$
DECLARE
  month_start timestamp := date_trunc('month', from_time AT TIME ZONE 'UTC');
  partition_name text;
  made integer := 0;
BEGIN
  WHILE month_start <= (to_time AT TIME ZONE 'UTC') LOOP
    partition_name := 'spot_' || to_char(month_start, 'YYYY_MM');
    IF to_regclass(partition_name) IS NULL THEN
      -- The lock that ATTACH takes anyhow. Not an advisory lock: taking a table's lock also makes this
      -- session hear of tables others made meanwhile, else the second look below would miss them.
      LOCK TABLE spot IN SHARE UPDATE EXCLUSIVE MODE;
      IF to_regclass(partition_name) IS NULL THEN
        EXECUTE format('CREATE TABLE %I (LIKE spot INCLUDING ALL)', partition_name);
        EXECUTE format('ALTER TABLE spot ATTACH PARTITION %I FOR VALUES FROM (%L) TO (%L)', partition_name,
          month_start AT TIME ZONE 'UTC', (month_start + interval '1 month') AT TIME ZONE 'UTC');
        made := made + 1;
      END IF;
    END IF;
    month_start := month_start + interval '1 month';
  END LOOP;
  RETURN made;
END $$;

-- The guard follows each change of antenna: a dwell that continues the same antenna without a gap has none.
CREATE VIEW tagged_spot AS
SELECT s.*, d.id AS dwell_id, d.antenna_id, d.starts_at AS dwell_starts_at, d.ends_at AS dwell_ends_at
FROM spot s
LEFT JOIN dwell d ON d.station_id = s.station_id AND d.receiver_id = s.receiver_id
  AND d.during @> (s.heard_at + s.heard_ms * interval '1 millisecond');
`;

const imports = `
CREATE TABLE saved_mapping (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id integer GENERATED ALWAYS AS IDENTITY,
  kind text NOT NULL CHECK (kind IN ('spots', 'dwells')),
  name text NOT NULL,
  mapping jsonb NOT NULL,
  created_by uuid REFERENCES app_user (id) ON DELETE SET NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, id)
);
CREATE UNIQUE INDEX saved_mapping_name ON saved_mapping (station_id, kind, lower(name));

CREATE TABLE import (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id integer GENERATED ALWAYS AS IDENTITY,
  kind text NOT NULL CHECK (kind IN ('spots', 'dwells')),
  file_name text NOT NULL,
  sha256 bytea,
  size_bytes bigint NOT NULL DEFAULT 0,
  state text NOT NULL CHECK (state IN ('uploading', 'uploaded', 'queued', 'running', 'done', 'failed', 'cancelled', 'undone')),
  mapping jsonb,
  rows_read bigint NOT NULL DEFAULT 0,
  rows_stored bigint NOT NULL DEFAULT 0,
  rows_doubled bigint NOT NULL DEFAULT 0,
  rows_refused bigint NOT NULL DEFAULT 0,
  rows_undone bigint NOT NULL DEFAULT 0,
  bytes_done bigint NOT NULL DEFAULT 0,
  first_at timestamptz,
  last_at timestamptz,
  error text,
  created_by uuid REFERENCES app_user (id) ON DELETE SET NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  started_at timestamptz,
  finished_at timestamptz,
  PRIMARY KEY (station_id, id)
);

-- The raw upload, gzip-compressed in pieces, so that neither process ever holds a whole file.
CREATE TABLE import_chunk (
  station_id integer NOT NULL,
  import_id integer NOT NULL,
  chunk_no integer NOT NULL,
  data bytea NOT NULL,
  PRIMARY KEY (station_id, import_id, chunk_no),
  FOREIGN KEY (station_id, import_id) REFERENCES import (station_id, id) ON DELETE CASCADE
);
ALTER TABLE import_chunk ALTER COLUMN data SET STORAGE EXTERNAL;

CREATE TABLE import_refusal (
  station_id integer NOT NULL,
  import_id integer NOT NULL,
  line_no bigint NOT NULL,
  field text,
  reason text NOT NULL,
  raw text NOT NULL,
  PRIMARY KEY (station_id, import_id, line_no),
  FOREIGN KEY (station_id, import_id) REFERENCES import (station_id, id) ON DELETE CASCADE
);
`;

const jobs = `
CREATE TABLE job (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id bigint GENERATED ALWAYS AS IDENTITY,
  kind text NOT NULL CHECK (kind IN ('import', 'import-undo', 'units', 'bearings')),
  payload jsonb NOT NULL,
  state text NOT NULL DEFAULT 'queued' CHECK (state IN ('queued', 'running', 'done', 'dead', 'cancelled')),
  attempts smallint NOT NULL DEFAULT 0,
  max_attempts smallint NOT NULL DEFAULT 5,
  run_at timestamptz NOT NULL DEFAULT now(),
  claimed_by text,
  heartbeat_at timestamptz,
  progress jsonb,
  error text,
  cancel_requested boolean NOT NULL DEFAULT false,
  created_by uuid REFERENCES app_user (id) ON DELETE SET NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  finished_at timestamptz,
  PRIMARY KEY (station_id, id)
);
CREATE INDEX job_waiting ON job (run_at) WHERE state IN ('queued', 'running');

-- One run per tick of a timed job over any number of workers: the first to insert the tick runs it.
CREATE TABLE timed_run (
  name text NOT NULL,
  tick timestamptz NOT NULL,
  claimed_by text NOT NULL,
  PRIMARY KEY (name, tick)
);
`;

const units = `
-- An hour whose spots or dwells changed since its units were made. Every block length divides the hour.
-- Writers upsert with DO UPDATE: taking the row lock makes a concurrent unit maker wait for their commit.
CREATE TABLE dirty_block (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  starts_at timestamptz NOT NULL,
  marked_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, starts_at)
);

-- The units of one antenna pair and night under one set of rules, packed (shared/pairing/pack.ts).
-- A cache that can always be made again from spots and dwells.
CREATE TABLE unit_pack (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  rules_key text NOT NULL,
  antenna_a integer NOT NULL,
  antenna_b integer NOT NULL,
  night date NOT NULL,
  unit_count integer NOT NULL,
  heard_only_count integer NOT NULL,
  units bytea NOT NULL,
  heard_only bytea NOT NULL,
  made_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, rules_key, antenna_a, antenna_b, night),
  CHECK (antenna_a < antenna_b)
);
ALTER TABLE unit_pack ALTER COLUMN units SET STORAGE EXTERNAL;
ALTER TABLE unit_pack ALTER COLUMN heard_only SET STORAGE EXTERNAL;

-- Which nights have been made under which rules, and what was left out of them and why (packed tallies).
CREATE TABLE unit_night (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  rules_key text NOT NULL,
  night date NOT NULL,
  spots integer NOT NULL,
  tally jsonb NOT NULL,
  made_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, rules_key, night)
);
`;

const questions = `
CREATE TABLE trial (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id integer GENERATED ALWAYS AS IDENTITY,
  name text NOT NULL,
  question jsonb NOT NULL,
  notes text NOT NULL DEFAULT '',
  created_by uuid REFERENCES app_user (id) ON DELETE SET NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  updated_at timestamptz NOT NULL DEFAULT now(),
  archived_at timestamptz,
  PRIMARY KEY (station_id, id)
);
CREATE UNIQUE INDEX trial_name ON trial (station_id, lower(name)) WHERE archived_at IS NULL;
`;

const records = `
-- Append-only: the application's code has no statement that updates or deletes a row here, and the
-- database refuses one.
CREATE TABLE audit_entry (
  id bigint GENERATED ALWAYS AS IDENTITY PRIMARY KEY,
  station_id integer REFERENCES station (id) ON DELETE SET NULL,
  at timestamptz NOT NULL DEFAULT now(),
  user_id uuid,
  token_id uuid,
  action text NOT NULL,
  target text NOT NULL DEFAULT '',
  detail jsonb NOT NULL DEFAULT '{}',
  request_id text NOT NULL DEFAULT ''
);
CREATE INDEX audit_entry_station ON audit_entry (station_id, id);

-- The one change let through is the foreign key's own: a deleted station's entries lose its number.
CREATE FUNCTION refuse_audit_change() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF TG_OP = 'UPDATE' AND NEW.station_id IS NULL
    AND to_jsonb(NEW) - 'station_id' = to_jsonb(OLD) - 'station_id' THEN
    RETURN NEW;
  END IF;
  RAISE EXCEPTION 'The audit trail is append-only.';
END $$;
CREATE TRIGGER audit_entry_append_only BEFORE UPDATE OR DELETE
  ON audit_entry FOR EACH ROW EXECUTE FUNCTION refuse_audit_change();
CREATE TRIGGER audit_entry_no_truncate BEFORE TRUNCATE
  ON audit_entry FOR EACH STATEMENT EXECUTE FUNCTION refuse_audit_change();
`;
