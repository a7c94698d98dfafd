#pragma once
// The tables of schema 1. History tables end with (batch, position): the batch that brought the row and its
// place in it; they are only ever inserted into. names, meta and outbox lie outside the history.

namespace agreed::journal {

inline constexpr const char* kSchema1 = R"sql(
CREATE TABLE meta(
  id INTEGER PRIMARY KEY CHECK (id = 1), source TEXT NOT NULL, created_at INTEGER NOT NULL) STRICT;

CREATE TABLE names(id INTEGER PRIMARY KEY, text TEXT NOT NULL UNIQUE) STRICT;

CREATE TABLE batches(
  sequence INTEGER PRIMARY KEY, previous TEXT NOT NULL, sha256 TEXT NOT NULL,
  committed_at INTEGER NOT NULL) STRICT;

CREATE TABLE files(
  id INTEGER PRIMARY KEY, analyzer INTEGER NOT NULL REFERENCES names, name BLOB NOT NULL,
  sha256 TEXT NOT NULL, size INTEGER NOT NULL, mtime_ns INTEGER NOT NULL,
  batch INTEGER NOT NULL, position INTEGER NOT NULL) STRICT;
CREATE INDEX files_by_content ON files(analyzer, sha256);

CREATE TABLE file_outcomes(
  file INTEGER PRIMARY KEY REFERENCES files, outcome TEXT NOT NULL, reason TEXT NOT NULL,
  batch INTEGER NOT NULL, position INTEGER NOT NULL) STRICT;
CREATE INDEX file_outcomes_by_outcome ON file_outcomes(outcome, file);

CREATE TABLE arrivals(
  file INTEGER NOT NULL REFERENCES files, analyzer INTEGER NOT NULL REFERENCES names,
  accepted INTEGER NOT NULL, repeated INTEGER NOT NULL, rejected INTEGER NOT NULL, voided INTEGER NOT NULL,
  censored INTEGER NOT NULL, newest_measured_at INTEGER,
  batch INTEGER NOT NULL, position INTEGER NOT NULL,
  PRIMARY KEY (file, analyzer, batch)) STRICT, WITHOUT ROWID;

CREATE TABLE readings(
  analyzer INTEGER NOT NULL, kind INTEGER NOT NULL, measurand INTEGER NOT NULL, item TEXT NOT NULL,
  measured_at INTEGER NOT NULL, replicate INTEGER NOT NULL, revision INTEGER NOT NULL,
  value REAL NOT NULL, censored INTEGER NOT NULL, file INTEGER NOT NULL REFERENCES files,
  line INTEGER NOT NULL, by TEXT NOT NULL, note TEXT NOT NULL, flags INTEGER NOT NULL,
  batch INTEGER NOT NULL, position INTEGER NOT NULL,
  PRIMARY KEY (analyzer, kind, measurand, item, measured_at, replicate, revision)) STRICT, WITHOUT ROWID;

CREATE TABLE voids(
  analyzer INTEGER NOT NULL, kind INTEGER NOT NULL, measurand INTEGER NOT NULL, item TEXT NOT NULL,
  measured_at INTEGER NOT NULL, replicate INTEGER NOT NULL, revision INTEGER NOT NULL,
  file INTEGER NOT NULL REFERENCES files, line INTEGER NOT NULL, by TEXT NOT NULL, note TEXT NOT NULL,
  batch INTEGER NOT NULL, position INTEGER NOT NULL,
  PRIMARY KEY (analyzer, kind, measurand, item, measured_at, replicate, revision),
  FOREIGN KEY (analyzer, kind, measurand, item, measured_at, replicate, revision) REFERENCES readings
  ) STRICT, WITHOUT ROWID;

CREATE TABLE interventions(
  id INTEGER PRIMARY KEY, analyzer TEXT NOT NULL, standard TEXT NOT NULL, measurand TEXT NOT NULL,
  kind TEXT NOT NULL, at INTEGER NOT NULL, by TEXT NOT NULL, note TEXT NOT NULL,
  file INTEGER REFERENCES files,
  batch INTEGER NOT NULL, position INTEGER NOT NULL,
  UNIQUE (analyzer, standard, measurand, kind, at)) STRICT;

CREATE TABLE rejected_rows(
  id INTEGER PRIMARY KEY, file INTEGER NOT NULL REFERENCES files, line INTEGER NOT NULL,
  field INTEGER NOT NULL, text BLOB NOT NULL, reason TEXT NOT NULL,
  batch INTEGER NOT NULL, position INTEGER NOT NULL) STRICT;
CREATE INDEX rejected_rows_by_file ON rejected_rows(file);

CREATE TABLE findings(
  id INTEGER PRIMARY KEY, at INTEGER NOT NULL, kind TEXT NOT NULL, subject TEXT NOT NULL, body TEXT NOT NULL,
  batch INTEGER NOT NULL, position INTEGER NOT NULL) STRICT;

CREATE TABLE alert_transitions(
  id INTEGER PRIMARY KEY, alert INTEGER NOT NULL, at INTEGER NOT NULL, change TEXT NOT NULL,
  state TEXT NOT NULL, body TEXT NOT NULL,
  batch INTEGER NOT NULL, position INTEGER NOT NULL) STRICT;
CREATE INDEX alert_transitions_by_alert ON alert_transitions(alert, id);

CREATE TABLE messages(
  id INTEGER PRIMARY KEY, webhook_id TEXT NOT NULL UNIQUE, route TEXT NOT NULL, type TEXT NOT NULL,
  body TEXT NOT NULL, alert INTEGER NOT NULL, created_at INTEGER NOT NULL, due_at INTEGER NOT NULL,
  batch INTEGER NOT NULL, position INTEGER NOT NULL) STRICT;
CREATE INDEX messages_by_alert ON messages(alert);

CREATE TABLE delivery_tries(
  id INTEGER PRIMARY KEY, message INTEGER NOT NULL REFERENCES messages, at INTEGER NOT NULL,
  status INTEGER NOT NULL, error TEXT NOT NULL, delivered INTEGER NOT NULL, given_up INTEGER NOT NULL,
  next_due INTEGER,
  batch INTEGER NOT NULL, position INTEGER NOT NULL) STRICT;
CREATE INDEX delivery_tries_by_message ON delivery_tries(message);

CREATE TABLE resends(
  id INTEGER PRIMARY KEY, message INTEGER NOT NULL REFERENCES messages, at INTEGER NOT NULL,
  batch INTEGER NOT NULL, position INTEGER NOT NULL) STRICT;

CREATE TABLE configurations(
  id INTEGER PRIMARY KEY, at INTEGER NOT NULL, sha256 TEXT NOT NULL, text TEXT NOT NULL,
  batch INTEGER NOT NULL, position INTEGER NOT NULL) STRICT;

CREATE TABLE outbox(
  message INTEGER PRIMARY KEY REFERENCES messages, route TEXT NOT NULL, state TEXT NOT NULL,
  due_at INTEGER NOT NULL, tries INTEGER NOT NULL) STRICT;
CREATE INDEX outbox_by_route ON outbox(route, state, message);
)sql";

}  // namespace agreed::journal
