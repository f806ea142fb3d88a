-- What is worked out from the facts, a table a stage. Every row is a function of the current
-- facts and the current plant file alone, computed in one go from all its inputs in order of
-- time, and can be worked again bit for bit: no clock, random id, receipt or history in here.
-- Times are microseconds since 1970 UTC, values SI, temperatures degrees Celsius.

-- Stage 1: filtration cycles that have ended.
CREATE TABLE cycle (
    plant                TEXT NOT NULL,
    train                TEXT NOT NULL,
    start_us             INTEGER NOT NULL,
    end_us               INTEGER NOT NULL,
    decided_us           INTEGER NOT NULL,  -- when the end was known; gives the day it belongs to
    volume_m             REAL NOT NULL,     -- filtered, m3/m2
    flux_m_s             REAL,
    temperature_degc     REAL,
    start_resistance_1_m REAL,
    start_half_width_1_m REAL,              -- half the 95 % interval
    end_resistance_1_m   REAL,
    end_tmp_pa           REAL,              -- as read
    taken_off_before_1_m REAL,              -- by the backwash before this cycle
    preceded_by          TEXT,
    followed_by          TEXT,
    left_out             TEXT,              -- why it does not count
    PRIMARY KEY (plant, train, start_us)
) STRICT, WITHOUT ROWID;

-- Stage 1: hours of the local clock.
CREATE TABLE hour (
    plant                TEXT NOT NULL,
    train                TEXT NOT NULL,
    start_us             INTEGER NOT NULL,
    end_us               INTEGER NOT NULL,
    resistance_1_m       REAL,              -- median of the steady readings
    resistance_min_1_m   REAL,
    resistance_max_1_m   REAL,
    flux_m_s             REAL,
    tmp_pa               REAL,
    temperature_degc     REAL,
    start_resistance_1_m REAL,              -- median of the starts of cycle
    start_half_width_1_m REAL,
    starts               INTEGER NOT NULL,
    end_tmp_max_pa       REAL,
    samples              INTEGER NOT NULL,  -- readings that count
    expected             INTEGER NOT NULL,
    filtration_s         REAL NOT NULL,
    volume_m             REAL NOT NULL,
    mostly               TEXT NOT NULL,
    quality              TEXT NOT NULL,
    reasons              TEXT NOT NULL,     -- codes, comma separated
    PRIMARY KEY (plant, train, start_us)
) STRICT, WITHOUT ROWID;

-- Stage 1: what a train did other than filter and backwash, cut at midnight.
CREATE TABLE phase (
    plant    TEXT NOT NULL,
    train    TEXT NOT NULL,
    start_us INTEGER NOT NULL,
    end_us   INTEGER NOT NULL,
    phase    TEXT NOT NULL,
    PRIMARY KEY (plant, train, start_us)
) STRICT, WITHOUT ROWID;

-- Stage 1: what a train did at its newest reading of a day.
CREATE TABLE train_now (
    plant     TEXT NOT NULL,
    train     TEXT NOT NULL,
    day_us    INTEGER NOT NULL,
    phase     TEXT NOT NULL,
    since_us  INTEGER NOT NULL,
    newest_us INTEGER NOT NULL,
    codes     TEXT NOT NULL,                -- state codes the plant file does not name, one a line
    PRIMARY KEY (plant, train, day_us)
) STRICT, WITHOUT ROWID;

-- Stage 2: plant days, local midnight to local midnight.
CREATE TABLE day (
    plant                 TEXT NOT NULL,
    train                 TEXT NOT NULL,
    start_us              INTEGER NOT NULL,
    end_us                INTEGER NOT NULL,
    resistance_1_m        REAL,             -- median of the hours' starts of cycle
    half_width_1_m        REAL,
    start_hours           INTEGER NOT NULL,
    coarse                INTEGER NOT NULL, -- 1: a steady median stands in
    steady_resistance_1_m REAL,
    flux_m_s              REAL,
    temperature_degc      REAL,
    end_tmp_max_pa        REAL,
    end_tmp_pa            REAL,
    laid_down_1_m         REAL,
    taken_off_1_m         REAL,
    volume_m              REAL NOT NULL,
    filtration_s          REAL NOT NULL,
    coverage              REAL NOT NULL,
    cycles                INTEGER NOT NULL,
    cycles_left_out       INTEGER NOT NULL,
    quality               TEXT NOT NULL,
    reasons               TEXT NOT NULL,
    PRIMARY KEY (plant, train, start_us)
) STRICT, WITHOUT ROWID;

-- Stage 3: runs, from the return after one clean in place to the next clean.
CREATE TABLE run (
    plant           TEXT NOT NULL,
    train           TEXT NOT NULL,
    start_us        INTEGER NOT NULL,
    clean_start_us  INTEGER NOT NULL,
    cleaning        TEXT,                   -- id of the recorded clean; NULL where only seen
    before_level    TEXT,                   -- JSON: level before the clean
    after_level     TEXT,                   -- JSON: level 24 to 48 h of filtration after it
    best            TEXT,                   -- JSON: what "after" is held against
    verdict         TEXT NOT NULL,
    verdict_us      INTEGER,                -- from when it is known
    slope_1_m_per_m REAL,
    PRIMARY KEY (plant, train, start_us)
) STRICT, WITHOUT ROWID;

-- Stage 3: what could be said of a train at the end of a plant day.
CREATE TABLE assessment (
    plant            TEXT NOT NULL,
    train            TEXT NOT NULL,
    day_us           INTEGER NOT NULL,
    as_of_us         INTEGER NOT NULL,
    run_start_us     INTEGER,
    run_days         INTEGER NOT NULL,
    baseline         TEXT,                  -- JSON
    trend            TEXT,                  -- JSON
    growth           TEXT,                  -- JSON
    growth_from      TEXT,
    temperature_degc REAL,
    holds            TEXT NOT NULL,         -- JSON: the four limits in order
    dates            TEXT NOT NULL,         -- JSON: P10, P50, P90 of each
    PRIMARY KEY (plant, train, day_us)
) STRICT, WITHOUT ROWID;

-- Stage 4: findings at the end of a plant day.
CREATE TABLE finding (
    plant    TEXT NOT NULL,
    train    TEXT NOT NULL,
    day_us   INTEGER NOT NULL,
    kind     TEXT NOT NULL,
    as_of_us INTEGER NOT NULL,
    evidence TEXT NOT NULL,                 -- JSON
    PRIMARY KEY (plant, train, day_us, kind)
) STRICT, WITHOUT ROWID;

-- Of which plant file and which version of the derivation the rows above are.
CREATE TABLE derivation (
    plant    TEXT NOT NULL PRIMARY KEY,
    version  INTEGER NOT NULL,
    revision TEXT NOT NULL
) STRICT, WITHOUT ROWID;
