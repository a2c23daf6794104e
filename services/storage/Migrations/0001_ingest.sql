-- Schemas, roles and the facts. One role a service, each with the least it needs: only ingest writes facts,
-- only analysis writes estimates, only report writes plans. Roles belong to the cluster, so they may be there.
DO $body$
DECLARE
  name text;
BEGIN
  FOREACH name IN ARRAY ARRAY['wearwatch_ingest', 'wearwatch_analysis', 'wearwatch_report'] LOOP
    IF NOT EXISTS (SELECT FROM pg_roles WHERE rolname = name) THEN
      BEGIN
        EXECUTE format('CREATE ROLE %I NOLOGIN', name);
      EXCEPTION WHEN duplicate_object OR unique_violation THEN
        NULL; -- another database of the same cluster was quicker
      END;
    END IF;
    IF NOT pg_has_role(current_user, name, 'MEMBER') THEN
      EXECUTE format('GRANT %I TO CURRENT_USER', name);
    END IF;
  END LOOP;
END
$body$;

CREATE SCHEMA ingest;
CREATE SCHEMA analysis;
CREATE SCHEMA report;

GRANT USAGE ON SCHEMA ingest, analysis TO wearwatch_ingest, wearwatch_analysis, wearwatch_report;
GRANT USAGE ON SCHEMA report TO wearwatch_report;

-- Later migrations only create their tables: these make every table of a schema its own service's.
ALTER DEFAULT PRIVILEGES IN SCHEMA ingest GRANT SELECT ON TABLES TO wearwatch_ingest, wearwatch_analysis, wearwatch_report;
ALTER DEFAULT PRIVILEGES IN SCHEMA analysis GRANT SELECT, INSERT, UPDATE, DELETE ON TABLES TO wearwatch_analysis;
ALTER DEFAULT PRIVILEGES IN SCHEMA analysis GRANT SELECT ON TABLES TO wearwatch_ingest, wearwatch_report;
ALTER DEFAULT PRIVILEGES IN SCHEMA analysis GRANT USAGE ON SEQUENCES TO wearwatch_analysis;
ALTER DEFAULT PRIVILEGES IN SCHEMA report GRANT SELECT, INSERT, UPDATE, DELETE ON TABLES TO wearwatch_report;
ALTER DEFAULT PRIVILEGES IN SCHEMA report GRANT USAGE ON SEQUENCES TO wearwatch_report;

-- Every fact as it was taken in; rows are only ever added.
CREATE TABLE ingest.fact (
  depot         text        NOT NULL,
  id            text        NOT NULL,
  seq           bigint      GENERATED ALWAYS AS IDENTITY,  -- order of arrival
  kind          text        NOT NULL,                      -- survey, vehicle, fitting, ...
  vehicle_id    text,                                      -- a coupling's trailer; null for settings
  tractor_id    text,                                      -- of a coupling
  tyre_id       text,                                      -- of a tyre or a fitting
  at            timestamptz NOT NULL,                      -- when it happened, or from when it holds
  content_hash  bytea       NOT NULL,                      -- SHA-256 of what was sent
  outcome       text        NOT NULL CHECK (outcome IN ('stored', 'held')),
  remarks       jsonb       NOT NULL,
  body          jsonb       NOT NULL,                      -- the record of the diagnosis library, in stored units
  sent          bytea       NOT NULL,                      -- what was sent, as a message of the contract
  readings      integer     NOT NULL DEFAULT 0,            -- depths, of a survey
  replaces      text,                                      -- id of the earlier fact this one corrects
  retracts      text,                                      -- id of the fact a withdrawal takes back
  releases      text,                                      -- id of the held fact a withdrawal lets through
  received_at   timestamptz NOT NULL DEFAULT now(),
  recorded_by   text        NOT NULL DEFAULT '',
  revision      bigint      NOT NULL,                      -- of the vehicle, or of the depot's settings
  PRIMARY KEY (depot, id)
);
CREATE UNIQUE INDEX fact_seq ON ingest.fact (seq);
CREATE INDEX fact_vehicle ON ingest.fact (vehicle_id, kind, at) WHERE vehicle_id IS NOT NULL;
CREATE INDEX fact_tractor ON ingest.fact (tractor_id) WHERE tractor_id IS NOT NULL;
CREATE INDEX fact_tyre ON ingest.fact (tyre_id) WHERE tyre_id IS NOT NULL;
CREATE INDEX fact_kind ON ingest.fact (kind, depot, at);
CREATE INDEX fact_replaces ON ingest.fact (depot, replaces) WHERE replaces IS NOT NULL;
CREATE INDEX fact_retracts ON ingest.fact (depot, retracts) WHERE retracts IS NOT NULL;
CREATE INDEX fact_releases ON ingest.fact (depot, releases) WHERE releases IS NOT NULL;
CREATE INDEX fact_held ON ingest.fact (seq) WHERE outcome = 'held';
GRANT INSERT ON ingest.fact TO wearwatch_ingest;

-- What holds now: stored, or held and let through; not taken back; not corrected by a fact that itself holds or
-- was corrected in turn. Served by fact_releases, fact_retracts and fact_replaces.
CREATE VIEW ingest.current_fact AS
SELECT f.*
FROM ingest.fact f
WHERE f.kind <> 'withdrawal'
  AND (f.outcome = 'stored' OR EXISTS (SELECT FROM ingest.fact w WHERE w.depot = f.depot AND w.releases = f.id))
  AND NOT EXISTS (SELECT FROM ingest.fact w WHERE w.depot = f.depot AND w.retracts = f.id)
  AND NOT EXISTS (
    SELECT FROM ingest.fact r
    WHERE r.depot = f.depot AND r.replaces = f.id
      AND (r.outcome = 'stored' OR EXISTS (SELECT FROM ingest.fact w WHERE w.depot = r.depot AND w.releases = r.id))
      AND NOT EXISTS (SELECT FROM ingest.fact w WHERE w.depot = r.depot AND w.retracts = r.id));

-- Held and still waiting for someone: not let through, not taken back, not corrected.
CREATE VIEW ingest.held_fact AS
SELECT f.*
FROM ingest.fact f
WHERE f.outcome = 'held'
  AND NOT EXISTS (SELECT FROM ingest.fact w WHERE w.depot = f.depot AND w.releases = f.id)
  AND NOT EXISTS (SELECT FROM ingest.fact w WHERE w.depot = f.depot AND w.retracts = f.id)
  AND NOT EXISTS (SELECT FROM ingest.fact r WHERE r.depot = f.depot AND r.replaces = f.id);

-- What was refused, and an id sent again with other content: kept with its reason, to be looked at and corrected.
CREATE TABLE ingest.set_aside (
  seq           bigint      GENERATED ALWAYS AS IDENTITY,
  depot         text        NOT NULL,
  id            text        NOT NULL,
  kind          text        NOT NULL,
  vehicle_id    text        NOT NULL DEFAULT '',
  content_hash  bytea       NOT NULL,
  remarks       jsonb       NOT NULL,
  sent          bytea       NOT NULL,                      -- as sent; of a steering chunk the first 100 samples a column
  received_at   timestamptz NOT NULL DEFAULT now(),
  recorded_by   text        NOT NULL DEFAULT '',
  settled_at    timestamptz,                               -- when the id was sent again and taken in
  PRIMARY KEY (depot, id, content_hash)
);
CREATE UNIQUE INDEX set_aside_seq ON ingest.set_aside (seq);
CREATE INDEX set_aside_open ON ingest.set_aside (depot, seq) WHERE settled_at IS NULL;
GRANT INSERT, UPDATE (settled_at) ON ingest.set_aside TO wearwatch_ingest;

-- One row a vehicle; every fact and chunk raises its revision in the fact's own transaction.
CREATE TABLE ingest.vehicle (
  depot       text   NOT NULL,                             -- home depot
  vehicle_id  text   NOT NULL UNIQUE,
  revision    bigint NOT NULL,
  PRIMARY KEY (depot, vehicle_id)
);
GRANT INSERT, UPDATE ON ingest.vehicle TO wearwatch_ingest;

-- Raised by facts that belong to a depot: its own, prices, limits, tolerances, settings, decisions on no vehicle.
CREATE TABLE ingest.settings_revision (
  depot     text   PRIMARY KEY,
  revision  bigint NOT NULL
);
GRANT INSERT, UPDATE ON ingest.settings_revision TO wearwatch_ingest;

CREATE TABLE ingest.stream (
  depot              text             NOT NULL,
  stream_id          text             NOT NULL,
  vehicle_id         text             NOT NULL,
  rate_hz            double precision NOT NULL,
  header             bytea            NOT NULL,            -- as sent
  header_hash        bytea            NOT NULL,
  committed_through  bigint           NOT NULL DEFAULT 0,  -- highest sequence without a gap before it
  chunks             bigint           NOT NULL DEFAULT 0,
  samples            bigint           NOT NULL DEFAULT 0,
  begun_at           timestamptz      NOT NULL DEFAULT now(),
  PRIMARY KEY (depot, stream_id)
);
CREATE INDEX stream_vehicle ON ingest.stream (vehicle_id);
GRANT INSERT, UPDATE ON ingest.stream TO wearwatch_ingest;

CREATE TABLE ingest.chunk (
  depot         text             NOT NULL,
  stream_id     text             NOT NULL,
  sequence      bigint           NOT NULL CHECK (sequence >= 1),
  vehicle_id    text             NOT NULL,
  start_at      timestamptz      NOT NULL,
  end_at        timestamptz      NOT NULL,
  rate_hz       double precision NOT NULL,
  samples       integer          NOT NULL,
  content_hash  bytea            NOT NULL,                 -- SHA-256 of the samples as sent
  columns       bytea            NOT NULL,                 -- quantised and compressed; first byte: codec version
  revision      bigint           NOT NULL,                 -- of the vehicle, when it was committed
  received_at   timestamptz      NOT NULL DEFAULT now(),
  PRIMARY KEY (depot, stream_id, sequence)
);
ALTER TABLE ingest.chunk ALTER COLUMN columns SET STORAGE EXTERNAL; -- compressed already
CREATE INDEX chunk_vehicle ON ingest.chunk (vehicle_id, revision, start_at);
GRANT INSERT ON ingest.chunk TO wearwatch_ingest;
