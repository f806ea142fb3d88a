-- What was said and done: recommendations, alarms and work orders, with every change. Entries
-- are only ever added; each holds the thing as it then was, with the evidence it stood on, so
-- that what was said on a day can be shown years later. `item` is the newest entry of each
-- thing, to find what is open without reading the history.

CREATE TABLE history (
    plant      TEXT NOT NULL,
    seq        INTEGER NOT NULL,
    kind       TEXT NOT NULL,               -- recommendation, alarm, work_order
    item       TEXT NOT NULL,               -- its id or number
    train      TEXT,
    change     TEXT NOT NULL,               -- raised, updated, closed, acted, ...
    as_of_us   INTEGER NOT NULL,            -- data time it stands on
    at_us      INTEGER NOT NULL,            -- service time
    actor      TEXT,                        -- the person, where a person did it
    reason     TEXT,                        -- late_data, plant_file_changed, or a person's
    receipt    TEXT,                        -- delivery that brought it about
    revision   TEXT NOT NULL,               -- plant file
    derivation INTEGER NOT NULL,
    content    TEXT NOT NULL,               -- JSON: the thing as it then was
    PRIMARY KEY (plant, seq)
) STRICT;
CREATE INDEX history_item ON history (plant, kind, item, seq);

CREATE TRIGGER history_kept BEFORE UPDATE ON history
BEGIN SELECT RAISE(ABORT, 'history is only added to'); END;
CREATE TRIGGER history_stays BEFORE DELETE ON history
BEGIN SELECT RAISE(ABORT, 'history is only added to'); END;

CREATE TABLE item (
    plant   TEXT NOT NULL,
    kind    TEXT NOT NULL,
    item    TEXT NOT NULL,
    train   TEXT,
    open    INTEGER NOT NULL,
    first   INTEGER NOT NULL,               -- seq of its first entry: the order of lists
    seq     INTEGER NOT NULL,               -- seq of its newest entry
    at_us   INTEGER NOT NULL,
    content TEXT NOT NULL,
    PRIMARY KEY (plant, kind, item)
) STRICT, WITHOUT ROWID;
CREATE INDEX item_open ON item (plant, kind, open, first);

-- Up to which closed hour of data time decisions have been taken.
CREATE TABLE stepped (
    plant TEXT NOT NULL PRIMARY KEY,
    to_us INTEGER NOT NULL
) STRICT, WITHOUT ROWID;
