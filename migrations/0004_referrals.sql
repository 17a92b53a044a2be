-- What is done about a referral, what an examiner found, and what left the programme.
--
-- A referral that an outcome opened has the id of its visit and needs no row of its own; a row adds
-- what is known beside the outcome, or opens one by hand.

CREATE TABLE referral (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    referral_id BLOB NOT NULL,
    child_id TEXT NOT NULL,
    visit_id BLOB,
    opened_on TEXT NOT NULL,
    urgency TEXT NOT NULL,
    act_by TEXT,
    reason TEXT NOT NULL,
    responsible TEXT NOT NULL,
    consent_to_share TEXT,
    interpreter TEXT,
    language TEXT NOT NULL,
    prior_exam TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX referral_key ON referral (referral_id);
CREATE INDEX referral_child ON referral (child_id);

CREATE TABLE step (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    step_id BLOB NOT NULL,
    referral_id BLOB NOT NULL,
    child_id TEXT NOT NULL,
    kind TEXT NOT NULL,
    done_on TEXT NOT NULL,
    done_at TEXT,
    channel TEXT,
    language TEXT NOT NULL,
    result TEXT,
    letter TEXT,
    due_on TEXT,
    worn TEXT,
    evidence TEXT,
    closing TEXT,
    whom TEXT NOT NULL,
    note TEXT NOT NULL,
    screener_id BLOB,
    entered_on TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX step_key ON step (step_id);
CREATE INDEX step_referral ON step (referral_id);
CREATE INDEX step_child ON step (child_id);

CREATE TABLE exam_report (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    report_id BLOB NOT NULL,
    referral_id BLOB NOT NULL,
    child_id TEXT NOT NULL,
    examined_on TEXT NOT NULL,
    received_on TEXT NOT NULL,
    evidence TEXT NOT NULL,
    screener_id BLOB,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX exam_report_key ON exam_report (report_id);
CREATE INDEX exam_report_referral ON exam_report (referral_id);
CREATE INDEX exam_report_child ON exam_report (child_id);

CREATE TABLE exam_value (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    report_id BLOB NOT NULL,
    field TEXT NOT NULL,
    value TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX exam_value_key ON exam_value (report_id, field);

CREATE TABLE disclosure (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    disclosure_id BLOB NOT NULL,
    child_id TEXT NOT NULL,
    disclosed_on TEXT NOT NULL,
    recipient TEXT NOT NULL,
    purpose TEXT NOT NULL,
    what TEXT NOT NULL,
    file_name TEXT NOT NULL,
    screener_id BLOB,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX disclosure_key ON disclosure (disclosure_id);
CREATE INDEX disclosure_child ON disclosure (child_id);

CREATE TRIGGER referral_no_update BEFORE UPDATE ON referral BEGIN
    SELECT RAISE(ABORT, 'referral is append-only');
END;
CREATE TRIGGER referral_no_delete BEFORE DELETE ON referral BEGIN
    SELECT RAISE(ABORT, 'referral is append-only');
END;

CREATE TRIGGER step_no_update BEFORE UPDATE ON step BEGIN
    SELECT RAISE(ABORT, 'step is append-only');
END;
CREATE TRIGGER step_no_delete BEFORE DELETE ON step BEGIN
    SELECT RAISE(ABORT, 'step is append-only');
END;

CREATE TRIGGER exam_report_no_update BEFORE UPDATE ON exam_report BEGIN
    SELECT RAISE(ABORT, 'exam_report is append-only');
END;
CREATE TRIGGER exam_report_no_delete BEFORE DELETE ON exam_report BEGIN
    SELECT RAISE(ABORT, 'exam_report is append-only');
END;

CREATE TRIGGER exam_value_no_update BEFORE UPDATE ON exam_value BEGIN
    SELECT RAISE(ABORT, 'exam_value is append-only');
END;
CREATE TRIGGER exam_value_no_delete BEFORE DELETE ON exam_value BEGIN
    SELECT RAISE(ABORT, 'exam_value is append-only');
END;

CREATE TRIGGER disclosure_no_update BEFORE UPDATE ON disclosure BEGIN
    SELECT RAISE(ABORT, 'disclosure is append-only');
END;
CREATE TRIGGER disclosure_no_delete BEFORE DELETE ON disclosure BEGIN
    SELECT RAISE(ABORT, 'disclosure is append-only');
END;
