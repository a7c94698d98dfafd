// The chain, worked out again here from the documented canonical text and from nothing of the journal's own
// code.
#include <doctest/doctest.h>

#include "daemon/journal/verify.hpp"
#include "independent_chain.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

std::vector<std::string> faults_after(const ScratchFolder& folder, const std::string& sql) {
  {
    Journal journal(folder.path());
    fill(journal);
  }
  run_sql(folder.database(), sql);
  return verify_journal(folder.path()).faults;
}

}  // namespace

TEST_CASE("the chain can be worked out again from the documented text") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  CHECK(journal.head().sha256 == head_of(folder.database()));
  fill(journal);
  CHECK(journal.head().sequence == 3);
  CHECK(journal.head().sha256 == head_of(folder.database()));
}

TEST_CASE("a rolled-back batch and a repeated row leave the chain as it would have been") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  journal.begin(at(0));
  journal.add_reading(journal.add_file(file_of("a")), check("wheat-low", 0, 1));
  journal.rollback();
  fill(journal);
  CHECK(journal.head().sha256 == head_of(folder.database()));
}

TEST_CASE("an untouched journal verifies, while the writer has it open and after") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  CHECK(verify_journal(folder.path()).faults.empty());
  fill(journal);
  const JournalProof proof = verify_journal(folder.path());
  for (const auto& fault : proof.faults) MESSAGE(fault);
  CHECK(proof.faults.empty());
  CHECK(proof.batches == 3);
  CHECK(proof.rows == static_cast<std::int64_t>(all_lines(folder.database()).size()));
  CHECK(proof.head.sequence == 3);
  CHECK(proof.head.sha256 == journal.head().sha256);
}

TEST_CASE("any change to history is found") {
  for (const char* sql : {
           "UPDATE readings SET value = 10.7 WHERE measured_at = (SELECT max(measured_at) FROM readings)",
           "UPDATE readings SET note = 'x' WHERE censored = 1",
           "DELETE FROM readings WHERE measured_at = (SELECT max(measured_at) FROM readings)",
           "UPDATE readings SET position = 100000 WHERE censored = 1",
           "UPDATE names SET text = 'line9' WHERE text = 'line1'",
           "DELETE FROM voids",
           "UPDATE rejected_rows SET reason = ''",
           "UPDATE alert_transitions SET state = 'resolved'",
           "DELETE FROM interventions WHERE id = 2",
           "INSERT INTO interventions VALUES(3, 'line1', '', '', 'noted', 0, '', '', NULL, 2, 900)",
           "INSERT INTO interventions VALUES(3, 'line1', '', '', 'noted', 0, '', '', NULL, 9, 1)",
           "UPDATE batches SET committed_at = committed_at + 1 WHERE sequence = 2",
           "UPDATE batches SET sha256 = printf('%064d', 0) WHERE sequence = 3",
           "DELETE FROM batches WHERE sequence = 2",
           "DELETE FROM batches WHERE sequence = 3",
           "UPDATE meta SET created_at = 0",
           "UPDATE configurations SET text = 'site: Other'",
       }) {
    CAPTURE(sql);
    const ScratchFolder folder;
    CHECK_FALSE(faults_after(folder, sql).empty());
  }
}

TEST_CASE("the outbox's working columns lie outside the chain") {
  const ScratchFolder folder;
  CHECK(faults_after(folder, "UPDATE outbox SET due_at = 0, tries = 7").empty());
}
