-- Entries are only ever added: a row belongs to a transaction (tx, ord), carries the version of its
-- form (v) and a salt, and its bytes are hashed into the transaction. Units stand in column names,
-- dates are ISO text, instants UTC milliseconds with the offset of the wall clock beside them.

CREATE TABLE tx (
    tx INTEGER PRIMARY KEY,
    chain BLOB NOT NULL,
    seq INTEGER NOT NULL,
    lamport INTEGER NOT NULL,
    recorded_at_ms INTEGER NOT NULL,
    offset_minutes INTEGER NOT NULL,
    screener BLOB,
    program_version TEXT NOT NULL,
    prev BLOB,
    n INTEGER NOT NULL,
    tx_hash BLOB NOT NULL,
    -- table, id and hash of each row, as hashed: names the row that was changed or removed
    entries BLOB NOT NULL,
    UNIQUE (chain, seq, tx_hash)
) STRICT;

CREATE INDEX tx_lamport ON tx (lamport);

CREATE TABLE programme (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    programme_id BLOB NOT NULL,
    name TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE TABLE chain (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    chain_id BLOB NOT NULL,
    why TEXT NOT NULL,
    follows_chain BLOB,
    follows_seq INTEGER,
    follows_hash BLOB,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE TABLE station (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    station_id BLOB NOT NULL,
    name TEXT NOT NULL,
    chart_id BLOB,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE TABLE screener (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    screener_id BLOB NOT NULL,
    initials TEXT NOT NULL,
    name TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE TABLE child (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    child_id TEXT NOT NULL,
    family_name TEXT NOT NULL,
    given_name TEXT NOT NULL,
    dob TEXT,
    provisional INTEGER NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX child_key ON child (child_id);

CREATE TABLE child_detail (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    child_id TEXT NOT NULL,
    sex TEXT NOT NULL,
    language TEXT NOT NULL,
    ethnicity TEXT NOT NULL,
    insurance TEXT NOT NULL,
    special_education TEXT,
    state_id TEXT NOT NULL,
    wears_glasses TEXT,
    last_exam_on TEXT,
    under_care TEXT,
    known_condition TEXT NOT NULL,
    doctor_name TEXT NOT NULL,
    doctor_phone TEXT NOT NULL,
    history TEXT NOT NULL,
    notes TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX child_detail_key ON child_detail (child_id);

CREATE TABLE guardian (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    child_id TEXT NOT NULL,
    place INTEGER NOT NULL,
    name TEXT NOT NULL,
    phone TEXT NOT NULL,
    email TEXT NOT NULL,
    address TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX guardian_key ON guardian (child_id, place);

CREATE TABLE consent (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    child_id TEXT NOT NULL,
    consent TEXT NOT NULL,
    given_by TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX consent_key ON consent (child_id);

CREATE TABLE site (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    code TEXT NOT NULL,
    name TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE TABLE enrolment (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    child_id TEXT NOT NULL,
    term TEXT NOT NULL,
    site TEXT NOT NULL,
    grade TEXT,
    class TEXT NOT NULL,
    teacher TEXT NOT NULL,
    from_on TEXT NOT NULL,
    left_on TEXT,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX enrolment_key ON enrolment (child_id, term);

CREATE TABLE term (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    code TEXT NOT NULL,
    title TEXT NOT NULL,
    starts_on TEXT NOT NULL,
    ends_on TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE TABLE chart (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    chart_id BLOB NOT NULL,
    name TEXT NOT NULL,
    optotypes TEXT NOT NULL,
    crowded INTEGER NOT NULL,
    letters_per_line INTEGER NOT NULL,
    distance_mm INTEGER NOT NULL,
    lines TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE TABLE screening_day (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    site TEXT NOT NULL,
    screened_on TEXT NOT NULL,
    protocol TEXT NOT NULL,
    term TEXT NOT NULL,
    acuity_method TEXT NOT NULL,
    chart_id BLOB,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX screening_day_key ON screening_day (site, screened_on, protocol);

CREATE TABLE visit (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    visit_id BLOB NOT NULL,
    child_id TEXT NOT NULL,
    site TEXT NOT NULL,
    screened_on TEXT NOT NULL,
    protocol TEXT NOT NULL,
    attempt TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX visit_key ON visit (child_id, site, screened_on, protocol, attempt);

CREATE INDEX visit_id ON visit (visit_id);

CREATE TABLE reading (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    visit_id BLOB NOT NULL,
    try_no INTEGER NOT NULL,
    field TEXT NOT NULL,
    value TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX reading_key ON reading (visit_id, try_no, field);

CREATE TABLE outcome (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    visit_id BLOB NOT NULL,
    kind TEXT NOT NULL,
    decided_by TEXT NOT NULL,
    urgency TEXT,
    act_within_days INTEGER,
    act_by TEXT,
    due_on TEXT,
    risks TEXT NOT NULL,
    criteria TEXT NOT NULL,
    unknown TEXT NOT NULL,
    qualifiers TEXT NOT NULL,
    reasons TEXT NOT NULL,
    protocol_notes TEXT NOT NULL,
    rule_set TEXT NOT NULL,
    edition TEXT NOT NULL,
    content_hash TEXT NOT NULL,
    age_months INTEGER,
    grade TEXT,
    screener_id BLOB,
    station_id BLOB,
    tested_on TEXT NOT NULL,
    entered_on TEXT NOT NULL,
    late INTEGER NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX outcome_key ON outcome (visit_id, rule_set, edition);

CREATE TABLE urgent_action (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    urgent_id BLOB NOT NULL,
    step TEXT NOT NULL,
    child_id TEXT NOT NULL,
    visit_id BLOB,
    signs TEXT NOT NULL,
    told TEXT NOT NULL,
    at_ms INTEGER NOT NULL,
    at_offset_minutes INTEGER NOT NULL,
    screener_id BLOB,
    note TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX urgent_action_key ON urgent_action (urgent_id, step);

CREATE INDEX urgent_action_child ON urgent_action (child_id);

CREATE TABLE correction (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    table_name TEXT NOT NULL,
    supersedes BLOB NOT NULL,
    replacement BLOB,
    reason TEXT NOT NULL,
    screener_id BLOB,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE TABLE setting (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    name TEXT NOT NULL,
    value TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX setting_key ON setting (name);

CREATE TABLE column_mapping (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    kind TEXT NOT NULL,
    header TEXT NOT NULL,
    meaning TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE TABLE import (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    import_id BLOB NOT NULL,
    kind TEXT NOT NULL,
    file_name TEXT NOT NULL,
    file_hash TEXT NOT NULL,
    rows_new INTEGER NOT NULL,
    rows_changed INTEGER NOT NULL,
    rows_unchanged INTEGER NOT NULL,
    rows_gone INTEGER NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE TABLE rule_set_used (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    content_hash TEXT NOT NULL,
    rule_set TEXT NOT NULL,
    edition TEXT NOT NULL,
    text TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX rule_set_used_key ON rule_set_used (content_hash);

-- State, derived from the entries in the same transaction and never in the ledger.

CREATE TABLE superseded (
    id BLOB NOT NULL PRIMARY KEY
) STRICT, WITHOUT ROWID;

CREATE TABLE chain_current (
    chain BLOB NOT NULL PRIMARY KEY,
    seq INTEGER NOT NULL,
    tx_hash BLOB NOT NULL,
    entries INTEGER NOT NULL
) STRICT, WITHOUT ROWID;

CREATE TABLE child_current (
    child_id TEXT NOT NULL PRIMARY KEY,
    family_name TEXT NOT NULL,
    given_name TEXT NOT NULL,
    dob TEXT,
    provisional INTEGER NOT NULL,
    search TEXT NOT NULL,
    site TEXT,
    term TEXT,
    grade TEXT,
    class TEXT,
    teacher TEXT,
    left_on TEXT,
    sex TEXT,
    language TEXT,
    wears_glasses TEXT,
    under_care TEXT,
    last_exam_on TEXT,
    known_condition TEXT,
    history TEXT,
    notes TEXT,
    guardian_name TEXT,
    guardian_phone TEXT,
    consent TEXT,
    detail_id BLOB,
    guardian_id BLOB,
    guardian2_id BLOB
) STRICT, WITHOUT ROWID;

CREATE INDEX child_current_site ON child_current (site);

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
    recorded_at_ms INTEGER NOT NULL
) STRICT, WITHOUT ROWID;

CREATE INDEX visit_current_day ON visit_current (screened_on, site, protocol);
CREATE INDEX visit_current_child ON visit_current (child_id);
CREATE INDEX visit_current_kind ON visit_current (kind);

-- Which installation this is: the chain it writes and its station. Copied with a backup; a restore
-- begins a new chain.
CREATE TABLE here (
    one INTEGER NOT NULL PRIMARY KEY CHECK (one = 1),
    programme BLOB NOT NULL,
    station BLOB NOT NULL,
    chain BLOB NOT NULL
) STRICT, WITHOUT ROWID;

-- The triggers guard against our own mistakes, the ledger against people.

CREATE TRIGGER tx_no_update BEFORE UPDATE ON tx BEGIN
    SELECT RAISE(ABORT, 'tx is append-only');
END;
CREATE TRIGGER tx_no_delete BEFORE DELETE ON tx BEGIN
    SELECT RAISE(ABORT, 'tx is append-only');
END;

CREATE TRIGGER programme_no_update BEFORE UPDATE ON programme BEGIN
    SELECT RAISE(ABORT, 'programme is append-only');
END;
CREATE TRIGGER programme_no_delete BEFORE DELETE ON programme BEGIN
    SELECT RAISE(ABORT, 'programme is append-only');
END;

CREATE TRIGGER chain_no_update BEFORE UPDATE ON chain BEGIN
    SELECT RAISE(ABORT, 'chain is append-only');
END;
CREATE TRIGGER chain_no_delete BEFORE DELETE ON chain BEGIN
    SELECT RAISE(ABORT, 'chain is append-only');
END;

CREATE TRIGGER station_no_update BEFORE UPDATE ON station BEGIN
    SELECT RAISE(ABORT, 'station is append-only');
END;
CREATE TRIGGER station_no_delete BEFORE DELETE ON station BEGIN
    SELECT RAISE(ABORT, 'station is append-only');
END;

CREATE TRIGGER screener_no_update BEFORE UPDATE ON screener BEGIN
    SELECT RAISE(ABORT, 'screener is append-only');
END;
CREATE TRIGGER screener_no_delete BEFORE DELETE ON screener BEGIN
    SELECT RAISE(ABORT, 'screener is append-only');
END;

CREATE TRIGGER child_no_update BEFORE UPDATE ON child BEGIN
    SELECT RAISE(ABORT, 'child is append-only');
END;
CREATE TRIGGER child_no_delete BEFORE DELETE ON child BEGIN
    SELECT RAISE(ABORT, 'child is append-only');
END;

CREATE TRIGGER child_detail_no_update BEFORE UPDATE ON child_detail BEGIN
    SELECT RAISE(ABORT, 'child_detail is append-only');
END;
CREATE TRIGGER child_detail_no_delete BEFORE DELETE ON child_detail BEGIN
    SELECT RAISE(ABORT, 'child_detail is append-only');
END;

CREATE TRIGGER guardian_no_update BEFORE UPDATE ON guardian BEGIN
    SELECT RAISE(ABORT, 'guardian is append-only');
END;
CREATE TRIGGER guardian_no_delete BEFORE DELETE ON guardian BEGIN
    SELECT RAISE(ABORT, 'guardian is append-only');
END;

CREATE TRIGGER consent_no_update BEFORE UPDATE ON consent BEGIN
    SELECT RAISE(ABORT, 'consent is append-only');
END;
CREATE TRIGGER consent_no_delete BEFORE DELETE ON consent BEGIN
    SELECT RAISE(ABORT, 'consent is append-only');
END;

CREATE TRIGGER site_no_update BEFORE UPDATE ON site BEGIN
    SELECT RAISE(ABORT, 'site is append-only');
END;
CREATE TRIGGER site_no_delete BEFORE DELETE ON site BEGIN
    SELECT RAISE(ABORT, 'site is append-only');
END;

CREATE TRIGGER enrolment_no_update BEFORE UPDATE ON enrolment BEGIN
    SELECT RAISE(ABORT, 'enrolment is append-only');
END;
CREATE TRIGGER enrolment_no_delete BEFORE DELETE ON enrolment BEGIN
    SELECT RAISE(ABORT, 'enrolment is append-only');
END;

CREATE TRIGGER term_no_update BEFORE UPDATE ON term BEGIN
    SELECT RAISE(ABORT, 'term is append-only');
END;
CREATE TRIGGER term_no_delete BEFORE DELETE ON term BEGIN
    SELECT RAISE(ABORT, 'term is append-only');
END;

CREATE TRIGGER chart_no_update BEFORE UPDATE ON chart BEGIN
    SELECT RAISE(ABORT, 'chart is append-only');
END;
CREATE TRIGGER chart_no_delete BEFORE DELETE ON chart BEGIN
    SELECT RAISE(ABORT, 'chart is append-only');
END;

CREATE TRIGGER screening_day_no_update BEFORE UPDATE ON screening_day BEGIN
    SELECT RAISE(ABORT, 'screening_day is append-only');
END;
CREATE TRIGGER screening_day_no_delete BEFORE DELETE ON screening_day BEGIN
    SELECT RAISE(ABORT, 'screening_day is append-only');
END;

CREATE TRIGGER visit_no_update BEFORE UPDATE ON visit BEGIN
    SELECT RAISE(ABORT, 'visit is append-only');
END;
CREATE TRIGGER visit_no_delete BEFORE DELETE ON visit BEGIN
    SELECT RAISE(ABORT, 'visit is append-only');
END;

CREATE TRIGGER reading_no_update BEFORE UPDATE ON reading BEGIN
    SELECT RAISE(ABORT, 'reading is append-only');
END;
CREATE TRIGGER reading_no_delete BEFORE DELETE ON reading BEGIN
    SELECT RAISE(ABORT, 'reading is append-only');
END;

CREATE TRIGGER outcome_no_update BEFORE UPDATE ON outcome BEGIN
    SELECT RAISE(ABORT, 'outcome is append-only');
END;
CREATE TRIGGER outcome_no_delete BEFORE DELETE ON outcome BEGIN
    SELECT RAISE(ABORT, 'outcome is append-only');
END;

CREATE TRIGGER urgent_action_no_update BEFORE UPDATE ON urgent_action BEGIN
    SELECT RAISE(ABORT, 'urgent_action is append-only');
END;
CREATE TRIGGER urgent_action_no_delete BEFORE DELETE ON urgent_action BEGIN
    SELECT RAISE(ABORT, 'urgent_action is append-only');
END;

CREATE TRIGGER correction_no_update BEFORE UPDATE ON correction BEGIN
    SELECT RAISE(ABORT, 'correction is append-only');
END;
CREATE TRIGGER correction_no_delete BEFORE DELETE ON correction BEGIN
    SELECT RAISE(ABORT, 'correction is append-only');
END;

CREATE TRIGGER setting_no_update BEFORE UPDATE ON setting BEGIN
    SELECT RAISE(ABORT, 'setting is append-only');
END;
CREATE TRIGGER setting_no_delete BEFORE DELETE ON setting BEGIN
    SELECT RAISE(ABORT, 'setting is append-only');
END;

CREATE TRIGGER column_mapping_no_update BEFORE UPDATE ON column_mapping BEGIN
    SELECT RAISE(ABORT, 'column_mapping is append-only');
END;
CREATE TRIGGER column_mapping_no_delete BEFORE DELETE ON column_mapping BEGIN
    SELECT RAISE(ABORT, 'column_mapping is append-only');
END;

CREATE TRIGGER import_no_update BEFORE UPDATE ON import BEGIN
    SELECT RAISE(ABORT, 'import is append-only');
END;
CREATE TRIGGER import_no_delete BEFORE DELETE ON import BEGIN
    SELECT RAISE(ABORT, 'import is append-only');
END;

CREATE TRIGGER rule_set_used_no_update BEFORE UPDATE ON rule_set_used BEGIN
    SELECT RAISE(ABORT, 'rule_set_used is append-only');
END;
CREATE TRIGGER rule_set_used_no_delete BEFORE DELETE ON rule_set_used BEGIN
    SELECT RAISE(ABORT, 'rule_set_used is append-only');
END;
