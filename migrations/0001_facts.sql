-- Facts: what was delivered and what people recorded. Everything else this service says is
-- worked out from these tables and can be worked out again, so these are only ever added to,
-- and triggers keep it so. Every key begins with the plant. Times are microseconds since
-- 1970-01-01T00:00:00Z; lists are JSON text that json_each reads.

-- The plant file, each time its parsed content became another one.
CREATE TABLE plant_file (
    seq      INTEGER PRIMARY KEY,
    plant    TEXT NOT NULL,
    revision TEXT NOT NULL, -- hex SHA-256 of the parsed content
    mapping  TEXT NOT NULL, -- hex SHA-256 of what decides how an export is read
    content  TEXT NOT NULL,
    seen_us  INTEGER NOT NULL
) STRICT;
CREATE INDEX plant_file_revision ON plant_file (plant, revision);

CREATE TABLE receipt (
    plant              TEXT NOT NULL,
    id                 TEXT NOT NULL, -- sorts by time of receipt
    source             TEXT NOT NULL,
    mapping            TEXT NOT NULL,
    file               TEXT NOT NULL,
    received_us        INTEGER NOT NULL,
    digest             TEXT NOT NULL,
    from_us            INTEGER,
    to_us              INTEGER,
    rows               INTEGER NOT NULL,
    cells              INTEGER NOT NULL,
    outcome            TEXT NOT NULL,
    message            TEXT NOT NULL,
    accepted           INTEGER NOT NULL,
    repeated           INTEGER NOT NULL,
    revised            INTEGER NOT NULL,
    bad                INTEGER NOT NULL,
    missing            INTEGER NOT NULL,
    rejected           INTEGER NOT NULL,
    unmapped_columns   TEXT NOT NULL CHECK (json_valid(unmapped_columns)),
    time_zone          TEXT NOT NULL,
    repeated_hour_rows INTEGER NOT NULL,
    skipped_hour_rows  INTEGER NOT NULL,
    rejections         TEXT NOT NULL CHECK (json_valid(rejections)),
    rejections_total   INTEGER NOT NULL,
    changed_from       TEXT NOT NULL CHECK (json_valid(changed_from)), -- {"train": time_us}
    analysed           INTEGER NOT NULL CHECK (analysed IN (0, 1)),
    earlier            TEXT,
    notes              TEXT NOT NULL CHECK (json_valid(notes)),
    PRIMARY KEY (plant, id),
    -- The same file under the same mapping is answered with its first receipt.
    UNIQUE (plant, source, digest, mapping)
) STRICT;
CREATE INDEX receipt_pending ON receipt (plant, id) WHERE analysed = 0;

-- One tag's readings of one UTC day, as delivered and in the unit of the export. By tag and
-- not by train, because one tag may serve several trains. The form of `content` is described
-- in src/store/chunk; `codec` leaves room for another one.
CREATE TABLE reading_chunk (
    plant    TEXT NOT NULL,
    source   TEXT NOT NULL,
    tag      TEXT NOT NULL,
    day      INTEGER NOT NULL, -- days since 1970-01-01, UTC
    codec    INTEGER NOT NULL, -- 1: JSON text
    first_us INTEGER NOT NULL,
    last_us  INTEGER NOT NULL,
    n        INTEGER NOT NULL,
    content  TEXT NOT NULL,
    PRIMARY KEY (plant, source, tag, day)
) STRICT;
-- "How old are the data of this source?" is asked all the time.
CREATE INDEX reading_chunk_last ON reading_chunk (plant, source, last_us);

-- Values that were replaced. A value is written as JSON: 1.25, "RUN", {"bad":"No reply"}.
CREATE TABLE revision (
    seq       INTEGER PRIMARY KEY,
    plant     TEXT NOT NULL,
    source    TEXT NOT NULL,
    tag       TEXT NOT NULL,
    time_us   INTEGER NOT NULL,
    old_value TEXT NOT NULL,
    new_value TEXT NOT NULL,
    receipt   TEXT NOT NULL,
    -- Deferred, because the receipt is written last, when its counts are known.
    FOREIGN KEY (plant, receipt) REFERENCES receipt (plant, id) DEFERRABLE INITIALLY DEFERRED
) STRICT;
CREATE INDEX revision_reading ON revision (plant, source, tag, time_us);
CREATE INDEX revision_receipt ON revision (plant, receipt);

-- Cleans that somebody recorded.
CREATE TABLE cleaning (
    plant       TEXT NOT NULL,
    id          TEXT NOT NULL,
    train       TEXT NOT NULL,
    start_us    INTEGER NOT NULL,
    end_us      INTEGER NOT NULL CHECK (end_us >= start_us),
    kind        TEXT NOT NULL,
    steps       TEXT NOT NULL CHECK (json_valid(steps)),
    work_order  TEXT,
    reference   TEXT, -- the client's own, unique in the plant
    recorded_us INTEGER NOT NULL,
    recorded_by TEXT,
    PRIMARY KEY (plant, id),
    UNIQUE (plant, reference)
) STRICT;
CREATE INDEX cleaning_start ON cleaning (plant, start_us, id);

-- What people did to what this service said: accepted, declined, acknowledged, withdrew.
CREATE TABLE act (
    plant        TEXT NOT NULL,
    id           TEXT NOT NULL,
    at_us        INTEGER NOT NULL,
    actor        TEXT NOT NULL,
    what         TEXT NOT NULL,
    subject_kind TEXT NOT NULL,
    subject      TEXT NOT NULL,
    reason       TEXT,
    before_text  TEXT,
    after_text   TEXT,
    PRIMARY KEY (plant, id)
) STRICT;
CREATE INDEX act_subject ON act (plant, subject_kind, subject, id);

-- Days whose derived rows are older than their facts. No fact, but written with them, so that
-- a restart knows what is left to do. `mark` grows with every new reason; only the mark that
-- was worked may be cleared.
CREATE TABLE dirty (
    plant        TEXT NOT NULL,
    train        TEXT NOT NULL,
    day_start_us INTEGER NOT NULL,
    mark         INTEGER NOT NULL,
    PRIMARY KEY (plant, train, day_start_us)
) STRICT, WITHOUT ROWID;

-- One row, rewritten to see that the disk takes a write.
CREATE TABLE write_probe (
    one   INTEGER PRIMARY KEY CHECK (one = 1),
    at_us INTEGER NOT NULL
) STRICT;

CREATE TRIGGER plant_file_kept BEFORE UPDATE ON plant_file
BEGIN SELECT RAISE(ABORT, 'plant files are facts and are only added to'); END;
CREATE TRIGGER plant_file_stays BEFORE DELETE ON plant_file
BEGIN SELECT RAISE(ABORT, 'plant files are facts and are only added to'); END;
CREATE TRIGGER revision_kept BEFORE UPDATE ON revision
BEGIN SELECT RAISE(ABORT, 'revisions are facts and are only added to'); END;
CREATE TRIGGER revision_stays BEFORE DELETE ON revision
BEGIN SELECT RAISE(ABORT, 'revisions are facts and are only added to'); END;
CREATE TRIGGER cleaning_kept BEFORE UPDATE ON cleaning
BEGIN SELECT RAISE(ABORT, 'cleanings are facts and are only added to'); END;
CREATE TRIGGER cleaning_stays BEFORE DELETE ON cleaning
BEGIN SELECT RAISE(ABORT, 'cleanings are facts and are only added to'); END;
CREATE TRIGGER act_kept BEFORE UPDATE ON act
BEGIN SELECT RAISE(ABORT, 'acts are facts and are only added to'); END;
CREATE TRIGGER act_stays BEFORE DELETE ON act
BEGIN SELECT RAISE(ABORT, 'acts are facts and are only added to'); END;
CREATE TRIGGER receipt_stays BEFORE DELETE ON receipt
BEGIN SELECT RAISE(ABORT, 'receipts are facts and are only added to'); END;
-- All columns but `changed_from` and `analysed`, which the analysis that follows sets.
CREATE TRIGGER receipt_kept BEFORE UPDATE OF
    plant, id, source, mapping, file, received_us, digest, from_us, to_us, rows, cells, outcome,
    message, accepted, repeated, revised, bad, missing, rejected, unmapped_columns, time_zone,
    repeated_hour_rows, skipped_hour_rows, rejections, rejections_total, earlier, notes
ON receipt
BEGIN SELECT RAISE(ABORT, 'receipts are facts and are only added to'); END;

-- Readings one a row, for people with a SQLite shell. Name plant, source, tag and day in the
-- WHERE clause: they reach the key of reading_chunk, a bound on time_us alone does not.
-- `value` is a number or NULL; `word` is a word, or what the export said of a bad value.
CREATE VIEW reading AS
SELECT
    plant, source, tag, day,
    coalesce(grid_us, first_us + sum(delta_us) OVER so_far) AS time_us,
    CASE type
        WHEN 'integer' THEN sum(step) OVER so_far * 1.0 / scale
        WHEN 'real' THEN written
    END AS value,
    word,
    CASE WHEN type = 'text' AND written LIKE 'b%' THEN 'bad' ELSE 'good' END AS quality
FROM (
    -- Whatever needs the text is taken out of it here: the windows above sort their rows, and
    -- would carry the text of the whole day in each.
    SELECT
        c.plant, c.source, c.tag, c.day, c.first_us,
        c.first_us + v.key * (c.content ->> '$.step') AS grid_us,
        CASE WHEN c.content ->> '$.step' IS NULL
            THEN (c.content ->> ('$.dt[' || v.key || ']')) * (c.content ->> '$.tick')
        END AS delta_us,
        c.content ->> '$.scale' AS scale,
        v.key AS place, v.type AS type, v.value AS written,
        CASE v.type WHEN 'integer' THEN v.value END AS step,
        CASE
            WHEN v.type = 'text' THEN c.content ->> ('$.words[' || substr(v.value, 2) || ']')
            WHEN v.type = 'integer' AND c.content ->> '$.scale' IS NULL
                THEN c.content ->> ('$.words[' || v.value || ']')
        END AS word
    FROM reading_chunk AS c, json_each(c.content, '$.v') AS v
    WHERE v.type <> 'null'
)
WINDOW so_far AS (PARTITION BY plant, source, tag, day ORDER BY place);
