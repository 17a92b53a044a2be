-- Several stations, one day: a chain may fork, and the parts of a visit are one.

-- One row for each end of a chain; a chain has more than one only where it forked. `entries` counts
-- those since the end of the row it branched off from.
CREATE TABLE chain_ends (
    chain BLOB NOT NULL,
    seq INTEGER NOT NULL,
    tx_hash BLOB NOT NULL,
    entries INTEGER NOT NULL,
    PRIMARY KEY (chain, tx_hash)
) STRICT, WITHOUT ROWID;
INSERT INTO chain_ends SELECT chain, seq, tx_hash, entries FROM chain_current;
DROP TABLE chain_current;
ALTER TABLE chain_ends RENAME TO chain_current;

-- A visit is its key: the ids under which stations recorded one, each with the first of them.
CREATE TABLE visit_part (
    visit_id BLOB NOT NULL PRIMARY KEY,
    lead BLOB NOT NULL
) STRICT, WITHOUT ROWID;

CREATE INDEX visit_part_lead ON visit_part (lead);

-- One row for each key now, under the first id.
DROP TABLE visit_current;
CREATE TABLE visit_current (
    visit_id BLOB NOT NULL PRIMARY KEY,
    child_id TEXT NOT NULL,
    site TEXT NOT NULL,
    screened_on TEXT NOT NULL,
    protocol TEXT NOT NULL,
    attempt TEXT NOT NULL,
    status TEXT,
    readings INTEGER NOT NULL,
    tries INTEGER NOT NULL,
    outcome_id BLOB,
    kind TEXT,
    decided_by TEXT,
    urgency TEXT,
    act_by TEXT,
    due_on TEXT,
    qualifiers TEXT,
    screener_id BLOB,
    station_id BLOB,
    corrected INTEGER NOT NULL,
    conflict INTEGER NOT NULL,
    parts INTEGER NOT NULL,
    signatures INTEGER NOT NULL,
    recorded_at_ms INTEGER NOT NULL
) STRICT, WITHOUT ROWID;

CREATE INDEX visit_current_day ON visit_current (screened_on, site, protocol);
CREATE INDEX visit_current_child ON visit_current (child_id);
CREATE INDEX visit_current_kind ON visit_current (kind);

-- What packets of this programme are encrypted with; in no ledger.
ALTER TABLE here ADD COLUMN packet_key BLOB;
