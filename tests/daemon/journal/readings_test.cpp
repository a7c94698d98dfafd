// What becomes of a reading, rule by rule.
#include <limits>

#include <doctest/doctest.h>

#include "scratch.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

/// A journal with an open batch and one file.
struct OpenBatch {
  OpenBatch() : journal(folder.path()) {
    journal.begin(at(1'000'000));
    file = journal.add_file(file_of("first"));
  }
  RowOutcome add(const JournalReading& reading) { return journal.add_reading(file, reading).outcome; }

  ScratchFolder folder;
  Journal journal;
  std::int64_t file = 0;
};

}  // namespace

TEST_CASE("same key and same value is repeated, another value is a conflict and the stored one stands") {
  OpenBatch batch;
  CHECK(batch.add(check("wheat-low", 0, 10.62)) == RowOutcome::accepted);
  CHECK(batch.add(check("wheat-low", 0, 10.62)) == RowOutcome::repeated);
  const auto conflict = batch.journal.add_reading(batch.file, check("wheat-low", 0, 10.63));
  CHECK(conflict.outcome == RowOutcome::conflict);
  CHECK(conflict.stored_value == 10.62);
  CHECK(checks_of(batch.journal, "wheat-low") == std::vector{10.62});
  const auto totals = batch.journal.totals();
  CHECK(totals.readings_accepted == 1);
  CHECK(totals.readings_repeated == 1);
}

TEST_CASE("each part of the key makes another reading") {
  OpenBatch batch;
  const JournalReading first = check("wheat-low", 0, 10.62);
  CHECK(batch.add(first) == RowOutcome::accepted);
  JournalReading other = first;
  other.analyzer = "line2";
  CHECK(batch.add(other) == RowOutcome::accepted);
  other = first;
  other.kind = StoredKind::split;
  CHECK(batch.add(other) == RowOutcome::accepted);
  other = first;
  other.measurand = "moisture";
  CHECK(batch.add(other) == RowOutcome::accepted);
  other = first;
  other.item = "wheat-high";
  CHECK(batch.add(other) == RowOutcome::accepted);
  other = first;
  other.measured_at += Duration(1);
  CHECK(batch.add(other) == RowOutcome::accepted);
  other = first;
  other.replicate = 1;
  CHECK(batch.add(other) == RowOutcome::accepted);
}

TEST_CASE("values are compared bit for bit, without a tolerance") {
  OpenBatch batch;
  batch.add(check("wheat-low", 0, 0.3));
  CHECK(batch.add(check("wheat-low", 0, 0.1 + 0.2)) == RowOutcome::conflict);
}

TEST_CASE("minus zero is zero") {
  OpenBatch batch;
  CHECK(batch.add(check("wheat-low", 0, -0.0)) == RowOutcome::accepted);
  CHECK(batch.add(check("wheat-low", 0, 0.0)) == RowOutcome::repeated);
  CHECK(batch.add(check("wheat-low", 0, -0.0)) == RowOutcome::repeated);
}

TEST_CASE("censoring is part of the value; censored readings are counted and kept out of charts") {
  OpenBatch batch;
  JournalReading below = split("S-1", 0, 0.05);
  below.censored = -1;
  CHECK(batch.add(below) == RowOutcome::accepted);
  CHECK(batch.add(below) == RowOutcome::repeated);
  CHECK(batch.add(split("S-1", 0, 0.05)) == RowOutcome::conflict);
  CHECK(batch.journal.totals().readings_accepted == 1);
  CHECK(batch.journal.totals().readings_censored == 1);
  int seen = 0;
  batch.journal.each_split("line1", "protein",
                           [&](std::string_view, Instant, std::int32_t, double) { ++seen; });
  CHECK(seen == 0);
}

TEST_CASE("after a void the voided value is repeated and another value is the correction") {
  OpenBatch batch;
  batch.add(check("wheat-low", 0, 16.02));
  const auto voided = batch.journal.add_void(batch.file, check("wheat-low", 0, 0));
  REQUIRE(voided.size() == 1);
  CHECK(voided[0].analyzer == "line1");
  CHECK(voided[0].measurand == "protein");
  CHECK(voided[0].item == "wheat-low");
  CHECK(voided[0].kind == StoredKind::check);
  CHECK(voided[0].measured_at == at(0));
  CHECK(checks_of(batch.journal, "wheat-low").empty());
  CHECK(batch.add(check("wheat-low", 0, 16.02)) == RowOutcome::repeated);
  CHECK(checks_of(batch.journal, "wheat-low").empty());
  CHECK(batch.add(check("wheat-low", 0, 10.62)) == RowOutcome::accepted);
  CHECK(checks_of(batch.journal, "wheat-low") == std::vector{10.62});
  CHECK(batch.add(check("wheat-low", 0, 10.63)) == RowOutcome::conflict);
  CHECK(batch.journal.totals().readings_voided == 1);
}

TEST_CASE("the corrected value read again while the correction stands is repeated, not a conflict") {
  OpenBatch batch;
  batch.add(check("wheat-low", 0, 16.02));
  batch.journal.add_void(batch.file, check("wheat-low", 0, 0));
  batch.add(check("wheat-low", 0, 10.62));
  CHECK(batch.add(check("wheat-low", 0, 16.02)) == RowOutcome::repeated);
  CHECK(checks_of(batch.journal, "wheat-low") == std::vector{10.62});
}

TEST_CASE("a correction can be corrected, also back to the first value") {
  OpenBatch batch;
  batch.add(check("wheat-low", 0, 1));
  batch.journal.add_void(batch.file, check("wheat-low", 0, 0));
  batch.add(check("wheat-low", 0, 2));
  CHECK(batch.journal.add_void(batch.file, check("wheat-low", 0, 0)).size() == 1);
  CHECK(batch.add(check("wheat-low", 0, 2)) == RowOutcome::repeated);
  CHECK(batch.add(check("wheat-low", 0, 1)) == RowOutcome::accepted);
  CHECK(checks_of(batch.journal, "wheat-low") == std::vector{1.0});
}

TEST_CASE("a void takes back check and split of its key, repeating it does nothing") {
  OpenBatch batch;
  batch.add(check("A", 0, 1));
  batch.add(split("A", 0, 2));
  CHECK_FALSE(batch.journal.was_voided(check("A", 0, 0)));
  CHECK(batch.journal.add_void(batch.file, check("A", 0, 0)).size() == 2);
  CHECK(batch.journal.add_void(batch.file, check("A", 0, 0)).empty());
  CHECK(batch.journal.was_voided(check("A", 0, 0)));
  CHECK(batch.journal.totals().readings_voided == 2);
}

TEST_CASE("a void of what never was takes nothing back, and what comes later is accepted") {
  OpenBatch batch;
  CHECK(batch.journal.add_void(batch.file, check("wheat-low", 0, 0)).empty());
  CHECK_FALSE(batch.journal.was_voided(check("wheat-low", 0, 0)));
  CHECK(batch.add(check("wheat-low", 0, 1)) == RowOutcome::accepted);
}

TEST_CASE("a correction file read twice leaves its correction standing") {
  OpenBatch batch;
  batch.add(check("wheat-low", 0, 16.02));
  JournalReading take_back = check("wheat-low", 0, 0);
  take_back.line = 2;
  for (int reading = 0; reading < 2; ++reading) {
    const auto correction = batch.journal.add_file(file_of("correction"));
    batch.journal.add_void(correction, take_back);
    batch.journal.add_reading(correction, check("wheat-low", 0, 10.62));
  }
  CHECK(checks_of(batch.journal, "wheat-low") == std::vector{10.62});
  SUBCASE("and a void in another file takes the correction back") {
    CHECK(batch.journal.add_void(batch.journal.add_file(file_of("second")), take_back).size() == 1);
  }
}

TEST_CASE("a conflict is decided by arrival, not by value or time") {
  OpenBatch batch;
  batch.add(check("wheat-low", 0, 2));
  batch.add(check("wheat-high", 0, 1));
  CHECK(batch.journal.add_reading(batch.file, check("wheat-low", 0, 1)).stored_value == 2);
  CHECK(batch.journal.add_reading(batch.file, check("wheat-high", 0, 2)).stored_value == 1);
}

TEST_CASE("checks come by time and replicate, splits by sample, time and replicate, whatever the arrival") {
  OpenBatch batch;
  JournalReading second = check("wheat-low", 5, 6);
  second.replicate = 1;
  for (const auto& r :
       {check("wheat-low", 9, 9), second, check("wheat-low", -7, 1), check("wheat-low", 5, 5)})
    batch.add(r);
  CHECK(checks_of(batch.journal, "wheat-low") == std::vector{1.0, 5.0, 6.0, 9.0});

  for (const auto& r : {split("S-2", 1, 3), split("S-10", 9, 2), split("S-10", 2, 1)}) batch.add(r);
  std::vector<std::pair<std::string, double>> seen;
  batch.journal.each_split("line1", "protein",
                           [&](std::string_view sample, Instant, std::int32_t, double value) {
                             seen.emplace_back(sample, value);
                           });
  CHECK(seen == std::vector<std::pair<std::string, double>>{{"S-10", 1}, {"S-10", 2}, {"S-2", 3}});

  std::vector<double> of_one;
  batch.journal.each_split_of("line1", "protein", "S-10",
                              [&](Instant, std::int32_t, double value) { of_one.push_back(value); });
  CHECK(of_one == std::vector{1.0, 2.0});
}

TEST_CASE("reading inside the reading of another stream is possible") {
  OpenBatch batch;
  batch.add(check("wheat-low", 0, 1));
  batch.add(check("wheat-low", 1, 2));
  std::vector<std::size_t> counts;
  batch.journal.each_check("line1", "wheat-low", "protein", [&](Instant, std::int32_t, double) {
    counts.push_back(checks_of(batch.journal, "wheat-low").size());
  });
  CHECK(counts == std::vector<std::size_t>{2, 2});
}

TEST_CASE("a value that is not a number is refused and the batch is gone") {
  OpenBatch batch;
  batch.add(check("wheat-low", 0, 1));
  CHECK_THROWS_AS(batch.add(check("wheat-low", 1, std::numeric_limits<double>::quiet_NaN())), JournalError);
  CHECK(batch.journal.totals() == IntakeTotals{});
  CHECK_THROWS_AS(batch.add(check("wheat-low", 1, 1)), JournalError);
}
