/**
 * The shape of the store, step by step. Number n of the list takes a store from `user_version` n
 * to n + 1, in one transaction, so a kill in the middle leaves the old shape. A step that was
 * released is never changed; a new one is added.
 *
 * The SQL stands in a source file, not beside it: the built program then needs no search for it.
 */
export const migrations: readonly string[] = [
  `
  -- Names once, so that a reading costs a few bytes and not a name.
  CREATE TABLE probe (id INTEGER PRIMARY KEY, name TEXT NOT NULL UNIQUE) STRICT;
  CREATE TABLE item (id INTEGER PRIMARY KEY, name TEXT NOT NULL UNIQUE) STRICT;

  -- The log, and the inbox of the history. Offsets rise and are never reused; they are shared with
  -- further_reading. hour = t_ms / 3600000: keyed by (hour, probe, t) the inserts of one hour
  -- stay on neighbouring pages, five times as fast as keyed by (probe, t) (architecture.md §4),
  -- and a full hour can be lifted out as one block.
  CREATE TABLE reading (
    offset INTEGER PRIMARY KEY,
    part INTEGER NOT NULL,
    probe INTEGER NOT NULL,
    hour INTEGER NOT NULL,
    t_ms INTEGER NOT NULL,
    seq INTEGER NOT NULL,
    received_ms INTEGER NOT NULL,
    celsius REAL,
    quality INTEGER NOT NULL,
    time_source INTEGER NOT NULL
  ) STRICT;
  CREATE UNIQUE INDEX reading_key ON reading (hour, probe, t_ms, seq);
  CREATE INDEX reading_part ON reading (part);

  -- What came later for a key that was taken: another value (a conflict), or the live copy of a
  -- reading that was first heard as a retained one. Nothing here was dropped or overwritten.
  CREATE TABLE further_reading (
    offset INTEGER PRIMARY KEY,
    part INTEGER NOT NULL,
    probe INTEGER NOT NULL,
    hour INTEGER NOT NULL,
    t_ms INTEGER NOT NULL,
    seq INTEGER NOT NULL,
    received_ms INTEGER NOT NULL,
    celsius REAL,
    quality INTEGER NOT NULL,
    time_source INTEGER NOT NULL,
    conflict INTEGER NOT NULL
  ) STRICT;
  CREATE INDEX further_reading_key ON further_reading (hour, probe, t_ms, seq);
  CREATE INDEX further_reading_part ON further_reading (part);

  -- Quarantine. A payload that a device repeats is stored once.
  CREATE TABLE raw_payload (id INTEGER PRIMARY KEY, sha256 BLOB NOT NULL UNIQUE, bytes BLOB NOT NULL) STRICT;
  CREATE TABLE refused (
    id INTEGER PRIMARY KEY AUTOINCREMENT,
    received_ms INTEGER NOT NULL,
    topic TEXT NOT NULL,
    raw_payload INTEGER NOT NULL REFERENCES raw_payload,
    code TEXT NOT NULL,
    field TEXT NOT NULL,
    value TEXT NOT NULL,
    problem TEXT NOT NULL,
    remedy TEXT NOT NULL,
    notice INTEGER NOT NULL
  ) STRICT;

  CREATE TABLE counter (name TEXT PRIMARY KEY, n INTEGER NOT NULL) STRICT, WITHOUT ROWID;

  CREATE TABLE snapshot (
    part INTEGER PRIMARY KEY,
    offset INTEGER NOT NULL,
    model TEXT NOT NULL,
    config_revision INTEGER NOT NULL,
    state TEXT NOT NULL
  ) STRICT;

  -- The trail of verdicts: one row per change. The unique key makes a replay after a crash write
  -- nothing twice.
  CREATE TABLE verdict_change (
    id INTEGER PRIMARY KEY AUTOINCREMENT,
    item INTEGER NOT NULL,
    t_ms INTEGER NOT NULL,
    standing TEXT NOT NULL,
    phase TEXT NOT NULL,
    evidence TEXT NOT NULL,
    has_been_frozen INTEGER NOT NULL,
    judgement TEXT NOT NULL,
    UNIQUE (item, t_ms, standing, phase, evidence, has_been_frozen)
  ) STRICT;

  -- The estimate as it was reckoned then, thinned. Keyed by hour for the same reason as readings.
  CREATE TABLE estimate (
    hour INTEGER NOT NULL,
    item INTEGER NOT NULL,
    t_ms INTEGER NOT NULL,
    temperature_C REAL NOT NULL,
    u_K REAL NOT NULL,
    margin_K REAL NOT NULL,
    PRIMARY KEY (hour, item, t_ms)
  ) STRICT, WITHOUT ROWID;

  CREATE TABLE meta (key TEXT PRIMARY KEY, value TEXT NOT NULL) STRICT, WITHOUT ROWID;
  `,
]
