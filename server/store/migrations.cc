#include "store/migrations.h"

#include <array>

#include "absl/strings/str_cat.h"
#include "status/try.h"

namespace drover::store {
namespace {

// Times are microseconds since 1970 UTC. Doubles that must come back bit for bit are blobs of 8 bytes each.
constexpr const char* kFirst = R"sql(
CREATE TABLE store (
  one  INTEGER PRIMARY KEY CHECK (one = 1),
  id   TEXT    NOT NULL,
  term INTEGER NOT NULL CHECK (term >= 0)
) STRICT;

CREATE TABLE event (
  number  INTEGER PRIMARY KEY CHECK (number >= 1),
  study   INTEGER NOT NULL,                 -- 0: of no study
  kind    INTEGER NOT NULL,                 -- field number in Event
  time_us INTEGER NOT NULL,
  bytes   BLOB    NOT NULL,
  hash    BLOB    NOT NULL CHECK (length(hash) = 32)
) STRICT;

CREATE TABLE request (
  id        TEXT    PRIMARY KEY,
  principal TEXT    NOT NULL,
  digest    BLOB    NOT NULL,
  event     INTEGER NOT NULL REFERENCES event(number)  -- Answered: holds the response
) STRICT, WITHOUT ROWID;

CREATE TABLE principal (
  name TEXT PRIMARY KEY,
  role TEXT NOT NULL CHECK (role IN ('viewer', 'owner', 'worker', 'operator'))
) STRICT, WITHOUT ROWID;

CREATE TABLE code_definition (
  digest TEXT    PRIMARY KEY,
  name   TEXT    NOT NULL,
  nth    INTEGER NOT NULL UNIQUE,           -- order of definition
  bytes  BLOB    NOT NULL
) STRICT, WITHOUT ROWID;

CREATE TABLE study (
  id              INTEGER PRIMARY KEY,
  name            TEXT    NOT NULL UNIQUE,
  owner           TEXT    NOT NULL,
  state           INTEGER NOT NULL CHECK (state BETWEEN 1 AND 7),
  reason          INTEGER NOT NULL DEFAULT 0,
  sentence        TEXT    NOT NULL DEFAULT '',
  revision        INTEGER NOT NULL,         -- number of its newest event
  priority        INTEGER NOT NULL,
  learn_order     INTEGER NOT NULL,
  look_ahead      INTEGER NOT NULL CHECK (look_ahead >= 0),
  method          TEXT    NOT NULL,
  method_revision INTEGER NOT NULL,
  fingerprint     TEXT    NOT NULL,
  spec            BLOB    NOT NULL,
  candidates      INTEGER NOT NULL DEFAULT 0,
  asked           INTEGER NOT NULL DEFAULT 0,
  runs            INTEGER NOT NULL DEFAULT 0,
  evaluated       INTEGER NOT NULL DEFAULT 0,
  failed          INTEGER NOT NULL DEFAULT 0,
  withdrawn       INTEGER NOT NULL DEFAULT 0,
  learned         INTEGER NOT NULL DEFAULT 0,
  lost            INTEGER NOT NULL DEFAULT 0,
  wall_us         INTEGER NOT NULL DEFAULT 0,  -- of all settled runs
  best            INTEGER NOT NULL DEFAULT 0,  -- candidate; 0: none yet
  create_us       INTEGER NOT NULL,
  end_us          INTEGER NOT NULL DEFAULT 0
) STRICT;
CREATE INDEX study_open ON study(id) WHERE state NOT IN (4, 6);

CREATE TABLE study_code (
  study  INTEGER NOT NULL REFERENCES study(id),
  nth    INTEGER NOT NULL,                  -- 0: the fine code
  role   INTEGER NOT NULL,
  digest TEXT    NOT NULL REFERENCES code_definition(digest),
  cost   BLOB    NOT NULL,
  PRIMARY KEY (study, nth)
) STRICT, WITHOUT ROWID;

CREATE TABLE condition (
  study   INTEGER NOT NULL REFERENCES study(id),
  nth     INTEGER NOT NULL,
  "values" BLOB   NOT NULL,
  weight  BLOB    NOT NULL,
  PRIMARY KEY (study, nth)
) STRICT, WITHOUT ROWID;

CREATE TABLE candidate (
  study  INTEGER NOT NULL REFERENCES study(id),
  number INTEGER NOT NULL CHECK (number >= 1),
  origin INTEGER NOT NULL,
  point  BLOB    NOT NULL,
  "values" BLOB  NOT NULL,
  digest BLOB    NOT NULL,
  runs   INTEGER NOT NULL,
  ended  INTEGER NOT NULL DEFAULT 0,        -- of its runs: settled or withdrawn
  score  BLOB,                              -- once all are
  PRIMARY KEY (study, number)
) STRICT, WITHOUT ROWID;
CREATE INDEX candidate_open ON candidate(study, number) WHERE score IS NULL;

CREATE TABLE ask (
  study           INTEGER NOT NULL,
  number          INTEGER NOT NULL CHECK (number >= 1),
  candidate       INTEGER NOT NULL,
  purpose         TEXT    NOT NULL,
  learned_through INTEGER NOT NULL,
  PRIMARY KEY (study, number),
  FOREIGN KEY (study, candidate) REFERENCES candidate(study, number)
) STRICT, WITHOUT ROWID;
CREATE INDEX ask_candidate ON ask(study, candidate);

CREATE TABLE run (
  id           INTEGER PRIMARY KEY,
  study        INTEGER NOT NULL,
  number       INTEGER NOT NULL CHECK (number >= 1),
  candidate    INTEGER NOT NULL,
  condition    INTEGER NOT NULL,
  replicate    INTEGER NOT NULL,
  study_code   INTEGER NOT NULL,
  input_digest BLOB    NOT NULL,
  life         TEXT    NOT NULL DEFAULT 'open' CHECK (life IN ('open', 'set_aside', 'settled', 'withdrawn')),
  fence        INTEGER NOT NULL DEFAULT 0 CHECK (fence >= 0),
  settling     INTEGER NOT NULL DEFAULT 0,  -- fence of the attempt that settled it
  bound        INTEGER NOT NULL DEFAULT 0,
  reason       TEXT    NOT NULL DEFAULT '',
  UNIQUE (study, number),
  UNIQUE (study, candidate, condition, replicate, study_code),
  FOREIGN KEY (study, candidate) REFERENCES candidate(study, number),
  CHECK ((life = 'settled') = (settling > 0))
) STRICT;
CREATE INDEX run_open ON run(study, id) WHERE life IN ('open', 'set_aside');

CREATE TABLE session (
  id          INTEGER PRIMARY KEY,
  token       TEXT    NOT NULL UNIQUE,
  worker      TEXT    NOT NULL,
  host        TEXT    NOT NULL,
  version     TEXT    NOT NULL,
  boot        TEXT    NOT NULL,
  incarnation INTEGER NOT NULL,
  slots       INTEGER NOT NULL,
  fleet_job   TEXT    NOT NULL,
  opened      BLOB    NOT NULL,             -- the whole SessionOpened
  time_left_us INTEGER NOT NULL DEFAULT 0,
  newest      INTEGER NOT NULL CHECK (newest IN (0, 1))
) STRICT;
CREATE UNIQUE INDEX session_newest ON session(worker) WHERE newest = 1;

CREATE TABLE attempt (
  run       INTEGER NOT NULL REFERENCES run(id),
  fence     INTEGER NOT NULL CHECK (fence >= 1),
  session   INTEGER NOT NULL REFERENCES session(id),
  worker    TEXT    NOT NULL,
  state     TEXT    NOT NULL CHECK (state IN ('granted', 'begun', 'parked', 'stopping', 'settled', 'duplicate', 'lost',
                                              'handed_back')),
  released  INTEGER NOT NULL DEFAULT 0 CHECK (released IN (0, 1)),
  reason    TEXT    NOT NULL DEFAULT '',
  abnormal  INTEGER NOT NULL DEFAULT 0,
  report    BLOB,
  end_event INTEGER NOT NULL DEFAULT 0,
  PRIMARY KEY (run, fence)
) STRICT, WITHOUT ROWID;
CREATE INDEX attempt_open ON attempt(run, fence) WHERE state IN ('granted', 'begun', 'parked', 'stopping');

CREATE TABLE licence_pool (
  name  TEXT    PRIMARY KEY,
  count INTEGER NOT NULL CHECK (count >= 0)
) STRICT, WITHOUT ROWID;

CREATE TABLE licence_hold (
  run   INTEGER NOT NULL,
  fence INTEGER NOT NULL,
  pool  TEXT    NOT NULL,
  n     INTEGER NOT NULL CHECK (n >= 1),
  PRIMARY KEY (run, fence, pool),
  FOREIGN KEY (run, fence) REFERENCES attempt(run, fence)
) STRICT, WITHOUT ROWID;

CREATE TABLE output (
  run      INTEGER NOT NULL REFERENCES run(id),
  name     TEXT    NOT NULL,
  value    BLOB    NOT NULL CHECK (length(value) = 8),
  variance BLOB    CHECK (variance IS NULL OR length(variance) = 8),
  PRIMARY KEY (run, name)
) STRICT, WITHOUT ROWID;

CREATE TABLE file (
  hash  BLOB PRIMARY KEY CHECK (length(hash) = 32),
  state TEXT NOT NULL CHECK (state IN ('partial', 'whole')),
  size  INTEGER NOT NULL DEFAULT 0
) STRICT, WITHOUT ROWID;

CREATE TABLE learned (
  study     INTEGER NOT NULL,
  position  INTEGER NOT NULL CHECK (position >= 1),
  candidate INTEGER NOT NULL,
  ask       INTEGER NOT NULL DEFAULT 0,     -- 0: nobody asked
  PRIMARY KEY (study, position),
  UNIQUE (study, candidate),
  FOREIGN KEY (study, candidate) REFERENCES candidate(study, number)
) STRICT, WITHOUT ROWID;

CREATE TABLE search_state (
  study            INTEGER PRIMARY KEY REFERENCES study(id),
  absorbed_through INTEGER NOT NULL DEFAULT 0,
  bytes            BLOB    NOT NULL DEFAULT x'',
  sentence         TEXT    NOT NULL DEFAULT '',
  swarm_low        BLOB    NOT NULL DEFAULT x'',
  swarm_high       BLOB    NOT NULL DEFAULT x''
) STRICT;
)sql";

constexpr std::array kSteps = {kFirst};

absl::Status step(Connection& connection, int version) {
  DROVER_TRY(connection.execute("BEGIN IMMEDIATE"));
  const absl::Status made = [&]() -> absl::Status {
    DROVER_TRY(connection.execute(kSteps[static_cast<std::size_t>(version)]));
    DROVER_TRY(connection.execute(absl::StrCat("PRAGMA application_id = ", kApplicationId)));
    DROVER_TRY(connection.execute(absl::StrCat("PRAGMA user_version = ", version + 1)));
    Statement check(connection, "PRAGMA foreign_key_check");
    const bool broken = check.next();
    DROVER_TRY(check.end());
    if (broken) return absl::InternalError("a migration broke a foreign key");
    return connection.execute("COMMIT");
  }();
  if (!made.ok() && connection.in_transaction()) static_cast<void>(connection.execute("ROLLBACK"));
  return made;
}

}  // namespace

int newest_schema() { return static_cast<int>(kSteps.size()); }

absl::Status migrate(Connection& connection) {
  DROVER_ASSIGN(const std::int64_t version, connection.number("PRAGMA user_version"));
  DROVER_ASSIGN(const std::int64_t application, connection.number("PRAGMA application_id"));
  DROVER_ASSIGN(const std::int64_t tables, connection.number("SELECT count(*) FROM sqlite_schema"));
  if (tables > 0 && application != kApplicationId) {
    return absl::FailedPreconditionError("the database in it was made by another program; choose an empty folder");
  }
  if (version > newest_schema()) {
    return absl::FailedPreconditionError(
        absl::StrCat("its schema is version ", version, ", this program knows up to version ", newest_schema(),
                     "; use the newer program that made it"));
  }
  for (int next = static_cast<int>(version); next < newest_schema(); ++next) DROVER_TRY(step(connection, next));
  return absl::OkStatus();
}

}  // namespace drover::store
