-- An answer to a question lets a held survey through as a release does, and unlike a release it can be taken back. So what
-- was let through holds only while that which let it through stands.
CREATE OR REPLACE VIEW ingest.current_fact AS
SELECT f.*
FROM ingest.fact f
WHERE f.kind <> 'withdrawal'
  AND (f.outcome = 'stored' OR EXISTS (
    SELECT FROM ingest.fact w
    WHERE w.depot = f.depot AND w.releases = f.id
      AND NOT EXISTS (SELECT FROM ingest.fact x WHERE x.depot = w.depot AND x.retracts = w.id)))
  AND NOT EXISTS (SELECT FROM ingest.fact w WHERE w.depot = f.depot AND w.retracts = f.id)
  AND NOT EXISTS (
    SELECT FROM ingest.fact r
    WHERE r.depot = f.depot AND r.replaces = f.id
      AND (r.outcome = 'stored' OR EXISTS (
        SELECT FROM ingest.fact w
        WHERE w.depot = r.depot AND w.releases = r.id
          AND NOT EXISTS (SELECT FROM ingest.fact x WHERE x.depot = w.depot AND x.retracts = w.id)))
      AND NOT EXISTS (SELECT FROM ingest.fact w WHERE w.depot = r.depot AND w.retracts = r.id));

CREATE OR REPLACE VIEW ingest.held_fact AS
SELECT f.*
FROM ingest.fact f
WHERE f.outcome = 'held'
  AND NOT EXISTS (
    SELECT FROM ingest.fact w
    WHERE w.depot = f.depot AND w.releases = f.id
      AND NOT EXISTS (SELECT FROM ingest.fact x WHERE x.depot = w.depot AND x.retracts = w.id))
  AND NOT EXISTS (SELECT FROM ingest.fact w WHERE w.depot = f.depot AND w.retracts = f.id)
  AND NOT EXISTS (SELECT FROM ingest.fact r WHERE r.depot = f.depot AND r.replaces = f.id);
