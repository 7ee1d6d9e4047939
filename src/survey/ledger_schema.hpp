// The tables of the ledger. A change here is a new Ledger::kSchemaVersion and a line in docs/ledger.md.
#pragma once

namespace trotline {

/// "trot" in ASCII, so that `file` and the program tell a ledger from other SQLite files.
inline constexpr int kLedgerApplication = 0x74726F74;

inline constexpr const char* kLedgerSchema = R"sql(
CREATE TABLE run (
  run         INTEGER PRIMARY KEY,
  survey_file TEXT NOT NULL,
  version     TEXT NOT NULL,
  threads     INTEGER NOT NULL,
  began       TEXT NOT NULL,
  seconds     REAL,
  computed    INTEGER
);
CREATE TABLE job (
  job                       INTEGER PRIMARY KEY,
  source                    TEXT NOT NULL,
  species                   TEXT NOT NULL,
  position                  INTEGER,
  status                    TEXT NOT NULL CHECK (status IN ('done', 'weak', 'failed')),
  method                    TEXT,
  verdict                   TEXT,
  temperature_k             REAL,
  temperature_error_k       REAL,
  log10_column_density_cm2  REAL,
  log10_column_density_error REAL,
  chi2                      REAL,
  dof                       INTEGER,
  message                   TEXT NOT NULL,
  warnings                  INTEGER NOT NULL,
  table_file                TEXT NOT NULL,
  table_lines               TEXT NOT NULL,
  input_fingerprint         TEXT NOT NULL,
  species_fingerprint       TEXT NOT NULL,
  options                   TEXT NOT NULL,
  version                   TEXT NOT NULL,
  reason                    TEXT NOT NULL,
  again                     INTEGER NOT NULL,
  run                       INTEGER NOT NULL REFERENCES run (run),
  finished                  TEXT NOT NULL,
  seconds                   REAL NOT NULL,
  UNIQUE (source, species)
);
CREATE INDEX job_position ON job (position) WHERE position IS NOT NULL;
CREATE TABLE result (
  job  INTEGER PRIMARY KEY REFERENCES job (job),
  json TEXT NOT NULL
);
CREATE TABLE unread_table (
  file    TEXT PRIMARY KEY,
  message TEXT NOT NULL
);
)sql";

}  // namespace trotline
