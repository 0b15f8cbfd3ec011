/** The tables of a history, as they came to be. A history of an older version is brought up to this one when it is changed. */

/** Each brings a history from the version of its index to the next. They are never edited: new ones are added. */
export const MIGRATIONS: readonly string[] = [
  `
  CREATE TABLE dataset_check (
    id INTEGER PRIMARY KEY,
    content TEXT NOT NULL,           -- SHA-256 of the files
    judged_by TEXT NOT NULL,         -- SHA-256 of the plan and the rules
    name TEXT NOT NULL,
    path TEXT NOT NULL,
    bytes INTEGER NOT NULL,
    night TEXT NOT NULL,             -- UTC date on which the observation began, or the check where it has none
    time_start REAL,                 -- MJD (UTC)
    time_end REAL,
    field TEXT,
    band TEXT,                       -- frequency setup, by its edges and channels
    frequency_low REAL,              -- Hz
    frequency_high REAL,
    verdict TEXT,                    -- NULL where it could not be judged
    score REAL,
    score_after REAL,
    cause TEXT,                      -- what it suffers from most
    error TEXT,                      -- why it could not be judged
    plan TEXT,
    report TEXT,                     -- folder of the reports, relative to that of the index page
    tool TEXT NOT NULL,
    checked TEXT NOT NULL,           -- UTC
    UNIQUE (content, judged_by)
  );
  CREATE TABLE seen_file (
    path TEXT PRIMARY KEY,
    bytes INTEGER NOT NULL,
    changed TEXT NOT NULL,           -- modification and status change, nanoseconds
    content TEXT NOT NULL
  );
  CREATE TABLE finding (
    check_id INTEGER NOT NULL REFERENCES dataset_check (id) ON DELETE CASCADE,
    rule TEXT NOT NULL,
    family TEXT NOT NULL,
    verdict TEXT NOT NULL,
    severity REAL NOT NULL,
    title TEXT NOT NULL,
    place TEXT NOT NULL,
    antennas TEXT NOT NULL,          -- JSON list of names
    consequence TEXT NOT NULL
  );
  CREATE TABLE measured (
    check_id INTEGER NOT NULL REFERENCES dataset_check (id) ON DELETE CASCADE,
    kind TEXT NOT NULL,              -- antenna, baseline group, channel, rule
    item TEXT NOT NULL,
    measure TEXT NOT NULL,
    value REAL NOT NULL
  );
  CREATE INDEX check_by_night ON dataset_check (night);
  CREATE INDEX finding_by_check ON finding (check_id);
  CREATE INDEX measured_by_check ON measured (check_id);
  `,
  `
  CREATE TABLE interference (
    check_id INTEGER NOT NULL REFERENCES dataset_check (id) ON DELETE CASCADE,
    frequency_low REAL NOT NULL,     -- Hz
    frequency_high REAL NOT NULL,
    time_start REAL NOT NULL,        -- MJD (UTC)
    time_end REAL NOT NULL
  );
  CREATE INDEX interference_by_check ON interference (check_id);
  `,
];
