-- Worklists as they were shown: paging stays steady while analysis goes on, and follow-up can ask later what a
-- planner saw on which Monday. Only report writes here.
CREATE TABLE report.worklist (
  worklist_id  bigint       GENERATED ALWAYS AS IDENTITY PRIMARY KEY,
  made_at      timestamptz  NOT NULL DEFAULT now(),
  depot        text         NOT NULL,
  sort         text         NOT NULL,
  as_of        date         NOT NULL,
  mark         text         NOT NULL
);
CREATE INDEX worklist_latest ON report.worklist (depot, sort, worklist_id DESC);

CREATE TABLE report.worklist_row (
  worklist_id     bigint   NOT NULL REFERENCES report.worklist ON DELETE CASCADE,
  rank            integer  NOT NULL,
  depot           text     NOT NULL,
  vehicle_id      text     NOT NULL,
  listed_because  text     NOT NULL,
  body            jsonb    NOT NULL,
  PRIMARY KEY (worklist_id, rank)
);
