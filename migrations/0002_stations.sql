-- What a station does, school days, and children that a person found to be one.

-- Row version 2: the one test this station does, and whether outcomes wait for both eyes.
ALTER TABLE station ADD COLUMN task TEXT;
ALTER TABLE station ADD COLUMN masked INTEGER;

CREATE TABLE school_calendar (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    site TEXT NOT NULL,
    days_held TEXT NOT NULL,
    holidays TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX school_calendar_key ON school_calendar (site);

CREATE TABLE same_child (
    id BLOB NOT NULL UNIQUE,
    v INTEGER NOT NULL,
    salt BLOB NOT NULL,
    tx INTEGER NOT NULL REFERENCES tx (tx) DEFERRABLE INITIALLY DEFERRED,
    ord INTEGER NOT NULL,
    a TEXT NOT NULL,
    b TEXT NOT NULL,
    PRIMARY KEY (tx, ord)
) STRICT, WITHOUT ROWID;

CREATE INDEX same_child_key ON same_child (a, b);

CREATE TRIGGER school_calendar_no_update BEFORE UPDATE ON school_calendar BEGIN
    SELECT RAISE(ABORT, 'school_calendar is append-only');
END;
CREATE TRIGGER school_calendar_no_delete BEFORE DELETE ON school_calendar BEGIN
    SELECT RAISE(ABORT, 'school_calendar is append-only');
END;

CREATE TRIGGER same_child_no_update BEFORE UPDATE ON same_child BEGIN
    SELECT RAISE(ABORT, 'same_child is append-only');
END;
CREATE TRIGGER same_child_no_delete BEFORE DELETE ON same_child BEGIN
    SELECT RAISE(ABORT, 'same_child is append-only');
END;
