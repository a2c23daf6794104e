-- Estimates and findings. Only analysis writes here; everyone reads.

-- How far each vehicle is analysed, and why its last analysis failed, if it did (the diagnosis before it stays). A
-- worker claims a row with FOR UPDATE SKIP LOCKED and holds it until the findings are committed, so one that dies
-- loses nothing.
CREATE TABLE analysis.progress (
  depot          text    NOT NULL,
  vehicle_id     text    NOT NULL,
  done_revision  bigint  NOT NULL DEFAULT 0,
  done_settings  bigint  NOT NULL DEFAULT 0,
  done_fit       bigint  NOT NULL DEFAULT 0,
  done_method    text    NOT NULL DEFAULT '',
  failure        text,
  PRIMARY KEY (depot, vehicle_id)
);

-- Streams reduced to straight runs: how many chunks had been committed then, by which method, and what else they told.
CREATE TABLE analysis.reduction (
  depot       text    NOT NULL,
  stream_id   text    NOT NULL,
  vehicle_id  text    NOT NULL,
  chunks      bigint  NOT NULL DEFAULT 0,
  method      text    NOT NULL DEFAULT '',
  study       jsonb,
  PRIMARY KEY (depot, stream_id)
);

-- One stretch of straight driving. Units: s, km/h, N·m at the wheel, deg, sine of the bank, deg/s, kg.
CREATE TABLE analysis.straight_run (
  depot        text               NOT NULL,
  stream_id    text               NOT NULL,
  ordinal      integer            NOT NULL,
  vehicle_id   text               NOT NULL,
  sequence     bigint             NOT NULL,
  start_at     timestamptz        NOT NULL,
  seconds      double precision   NOT NULL,
  mode         text               NOT NULL,
  speed_km_h   double precision   NOT NULL,
  torque_nm    double precision,
  torque_se    double precision,
  with_assist  boolean            NOT NULL DEFAULT false,
  angle_deg    double precision,
  angle_se     double precision,
  bank         double precision,
  bank_se      double precision,
  yaw_rate     double precision,
  load_kg      double precision,
  road_cell    text,
  PRIMARY KEY (depot, stream_id, ordinal)
);
CREATE INDEX straight_run_vehicle ON analysis.straight_run (depot, vehicle_id, start_at);

-- Fleet-wide estimates (road, wear, technicians, what is usual): immutable snapshots.
CREATE TABLE analysis.fleet_fit (
  fleet_fit   bigint       GENERATED ALWAYS AS IDENTITY PRIMARY KEY,
  made_at     timestamptz  NOT NULL DEFAULT now(),
  as_of       date         NOT NULL,
  facts_mark  text         NOT NULL,
  method      text         NOT NULL,
  vehicles    integer      NOT NULL,
  runs        integer      NOT NULL,
  body        jsonb        NOT NULL
);

-- The published diagnosis of a vehicle; body is the contract's Diagnosis message as JSON.
CREATE TABLE analysis.diagnosis (
  depot                   text              NOT NULL,
  vehicle_id              text              NOT NULL,
  vehicle_class           text              NOT NULL,
  revision                bigint            NOT NULL,
  settings_revision       bigint            NOT NULL,
  fleet_fit               bigint            NOT NULL,
  method                  text              NOT NULL,
  as_of                   date              NOT NULL,
  made_at                 timestamptz       NOT NULL DEFAULT now(),
  misaligned_probability  double precision  NOT NULL,
  body                    jsonb             NOT NULL,
  PRIMARY KEY (depot, vehicle_id)
);

-- A finding keeps its id through re-analysis and says why it opened, changed or closed.
CREATE TABLE analysis.finding (
  depot            text              NOT NULL,
  finding_id       text              NOT NULL,
  vehicle_id       text              NOT NULL,
  kind             text              NOT NULL,
  place            text              NOT NULL,
  alignment_mends  boolean           NOT NULL,
  safety           boolean           NOT NULL,
  strength         double precision  NOT NULL,
  body             jsonb             NOT NULL,
  opened_at        timestamptz       NOT NULL DEFAULT now(),
  opened_because   text              NOT NULL,
  changed_at       timestamptz       NOT NULL DEFAULT now(),
  closed_at        timestamptz,
  closed_because   text,
  PRIMARY KEY (depot, finding_id)
);
CREATE UNIQUE INDEX finding_open ON analysis.finding (depot, vehicle_id, kind, place) WHERE closed_at IS NULL;
CREATE INDEX finding_listed ON analysis.finding (depot, safety DESC, strength DESC) WHERE closed_at IS NULL;

-- Tyres whose last reading is below the limit or that were marked unsafe, also where the survey is still held.
CREATE TABLE analysis.unsafe_tyre (
  depot         text               NOT NULL,
  vehicle_id    text               NOT NULL,
  position      text               NOT NULL,
  depth_mm      double precision,
  limit_mm      double precision,
  limit_source  text               NOT NULL,
  survey_id     text               NOT NULL,
  measured_at   timestamptz        NOT NULL,
  held          boolean            NOT NULL,
  sentence      text               NOT NULL,
  PRIMARY KEY (depot, vehicle_id, position)
);
