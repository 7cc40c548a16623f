import type { MigrationInterface, QueryRunner } from 'typeorm';

/**
 * Findings: answers frozen with what they rest on, the decisions taken on them, and links for guests.
 * A finding and its decisions are a record: the database itself refuses to change or delete them.
 */
export class Findings1764633600000 implements MigrationInterface {
  async up(queryRunner: QueryRunner): Promise<void> {
    for (const statements of [findings, decisions, shares, immutability]) {
      await queryRunner.query(statements);
    }
  }

  async down(): Promise<void> {
    throw new Error('Findings are a record and are not taken down: restore a backup instead.');
  }
}

const findings = `
CREATE TABLE finding (
  station_id integer NOT NULL REFERENCES station (id) ON DELETE CASCADE,
  id integer GENERATED ALWAYS AS IDENTITY,
  trial_id integer,
  title text NOT NULL CHECK (title <> ''),
  note text NOT NULL DEFAULT '',
  question jsonb NOT NULL,
  sentence text NOT NULL,
  -- What a list shows, so that it need not read whole answers.
  headline jsonb NOT NULL,
  answer jsonb NOT NULL,
  -- Station, receivers and what was left out, as they were.
  circumstances jsonb NOT NULL,
  first_night date NOT NULL,
  last_night date NOT NULL,
  digest bytea NOT NULL CHECK (octet_length(digest) = 32),
  night_digests jsonb NOT NULL,
  -- Everything the answer was computed from (server/features/findings/evidence-codec.ts).
  evidence bytea NOT NULL,
  dwell_count integer NOT NULL,
  pictures jsonb NOT NULL,
  program_version text NOT NULL,
  frozen_by uuid REFERENCES app_user (id) ON DELETE SET NULL,
  -- The name stays when the account goes.
  frozen_by_name text NOT NULL,
  frozen_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, id),
  FOREIGN KEY (station_id, trial_id) REFERENCES trial (station_id, id),
  CONSTRAINT finding_nights CHECK (first_night <= last_night)
);
-- Compressed already.
ALTER TABLE finding ALTER COLUMN evidence SET STORAGE EXTERNAL;
`;

const decisions = `
CREATE TABLE finding_decision (
  station_id integer NOT NULL,
  finding_id integer NOT NULL,
  id integer GENERATED ALWAYS AS IDENTITY,
  decision text NOT NULL CHECK (decision IN ('keep', 'rebuild', 'take down', 'look again')),
  -- Antenna A or B of the finding; null: the finding as a whole.
  about text CHECK (about IN ('a', 'b')),
  look_again_on date,
  reason text NOT NULL CHECK (reason <> ''),
  decided_by uuid REFERENCES app_user (id) ON DELETE SET NULL,
  decided_by_name text NOT NULL,
  decided_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (station_id, finding_id, id),
  FOREIGN KEY (station_id, finding_id) REFERENCES finding (station_id, id) ON DELETE CASCADE,
  CONSTRAINT finding_decision_date CHECK ((decision = 'look again') = (look_again_on IS NOT NULL))
);
`;

const shares = `
CREATE TABLE finding_share (
  station_id integer NOT NULL,
  id uuid NOT NULL DEFAULT gen_random_uuid(),
  finding_id integer NOT NULL,
  -- Only the SHA-256 of a token is kept.
  token_hash bytea NOT NULL,
  label text NOT NULL,
  created_by uuid REFERENCES app_user (id) ON DELETE SET NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  expires_at timestamptz NOT NULL,
  withdrawn_at timestamptz,
  last_read_at timestamptz,
  times_read integer NOT NULL DEFAULT 0,
  PRIMARY KEY (station_id, id),
  FOREIGN KEY (station_id, finding_id) REFERENCES finding (station_id, id) ON DELETE CASCADE,
  CONSTRAINT finding_share_expiry CHECK (expires_at > created_at)
);
CREATE UNIQUE INDEX finding_share_token ON finding_share (token_hash);
CREATE INDEX finding_share_finding ON finding_share (station_id, finding_id);
`;

const immutability = `
-- Two changes are let through, both a foreign key's own: a deleted account's number goes (its name stays),
-- and everything of a station goes with the station.
CREATE FUNCTION refuse_record_change() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  person text := TG_ARGV[0];
BEGIN
  IF TG_OP = 'UPDATE' THEN
    IF to_jsonb(NEW) ->> person IS NULL AND to_jsonb(NEW) - person = to_jsonb(OLD) - person THEN
      RETURN NEW;
    END IF;
  ELSIF TG_OP = 'DELETE' THEN
    IF NOT EXISTS (SELECT 1 FROM station WHERE id = OLD.station_id) THEN
      RETURN OLD;
    END IF;
  END IF;
  RAISE EXCEPTION 'The records of table % are never changed or deleted.', TG_TABLE_NAME;
END $$;
CREATE TRIGGER finding_immutable BEFORE UPDATE OR DELETE
  ON finding FOR EACH ROW EXECUTE FUNCTION refuse_record_change('frozen_by');
CREATE TRIGGER finding_no_truncate BEFORE TRUNCATE
  ON finding FOR EACH STATEMENT EXECUTE FUNCTION refuse_record_change('frozen_by');
CREATE TRIGGER finding_decision_immutable BEFORE UPDATE OR DELETE
  ON finding_decision FOR EACH ROW EXECUTE FUNCTION refuse_record_change('decided_by');
CREATE TRIGGER finding_decision_no_truncate BEFORE TRUNCATE
  ON finding_decision FOR EACH STATEMENT EXECUTE FUNCTION refuse_record_change('decided_by');
`;
