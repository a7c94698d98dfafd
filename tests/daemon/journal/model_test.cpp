// The journal against a model of a few lines: random rows, voids, rollbacks and reopenings.
#include <map>
#include <random>

#include <doctest/doctest.h>

#include "daemon/journal/verify.hpp"
#include "scratch.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

using Key = std::tuple<StoredKind, std::string, std::int64_t, std::int32_t>;

struct Stored {
  double value;
  bool voided;
};

/// The rules of README.md, told once more in the simplest way: every revision of every key in a map.
struct Model {
  std::map<Key, std::vector<Stored>> revisions;
  IntakeTotals totals;

  RowOutcome add(const Key& key, double value) {
    auto& all = revisions[key];
    const auto accept = [&] {
      all.push_back({value, false});
      ++totals.readings_accepted;
      return RowOutcome::accepted;
    };
    const auto repeat = [&] {
      ++totals.readings_repeated;
      return RowOutcome::repeated;
    };
    if (all.empty()) return accept();
    if (all.back().voided) return all.back().value == value ? repeat() : accept();
    for (const Stored& each : all)
      if (each.value == value) return repeat();
    return RowOutcome::conflict;
  }

  std::size_t take_back(const std::string& item, std::int64_t when, std::int32_t replicate) {
    std::size_t count = 0;
    for (const auto kind : {StoredKind::check, StoredKind::split}) {
      const auto found = revisions.find({kind, item, when, replicate});
      if (found == revisions.end() || found->second.empty() || found->second.back().voided) continue;
      found->second.back().voided = true;
      ++count;
    }
    totals.readings_voided += static_cast<std::int64_t>(count);
    return count;
  }

  [[nodiscard]] std::vector<double> standing(StoredKind kind, const std::string& item) const {
    std::vector<double> values;
    for (const auto& [key, all] : revisions)
      if (std::get<0>(key) == kind && std::get<1>(key) == item && !all.empty() && !all.back().voided)
        values.push_back(all.back().value);
    return values;
  }
};

struct Campaign {
  explicit Campaign(unsigned seed) : random(seed), journal(std::make_unique<Journal>(folder.path())) {}

  int pick(int below) { return std::uniform_int_distribution<int>(0, below - 1)(random); }

  JournalReading random_reading() {
    items.push_back("item-" + std::to_string(pick(3)));
    JournalReading reading = check(items.back(), pick(6) - 3, pick(3));
    reading.kind = pick(2) == 0 ? StoredKind::check : StoredKind::split;
    reading.replicate = pick(2);
    return reading;
  }

  static Key key_of(const JournalReading& r) {
    return {r.kind, std::string(r.item), r.measured_at.time_since_epoch().count(), r.replicate};
  }

  void step(std::int64_t file) {
    const JournalReading reading = random_reading();
    if (pick(4) > 0) {
      const auto result = journal->add_reading(file, reading);
      CHECK(result.outcome == model.add(key_of(reading), reading.value));
      if (result.outcome == RowOutcome::conflict)
        CHECK(result.stored_value == model.revisions[key_of(reading)].back().value);
    } else {
      const auto when = reading.measured_at.time_since_epoch().count();
      CHECK(journal->add_void(file, reading).size() ==
            model.take_back(std::string(reading.item), when, reading.replicate));
    }
  }

  void batch(int number) {
    const Model before = model;
    journal->begin(at(number));
    const auto file = journal->add_file(file_of("sha-" + std::to_string(number)));
    for (int i = pick(12); i >= 0; --i) step(file);
    compare();
    if (pick(4) == 0) {
      journal->rollback();
      model = before;
    } else {
      journal->finish_file(file, "done", "");
      ++model.totals.files_done;
      model.totals.last_commit_at = at(number);
      journal->commit();
      CHECK(journal->totals() == model.totals);
    }
    if (pick(6) == 0) journal = std::make_unique<Journal>(folder.path());
    compare();
  }

  void compare() {
    for (int i = 0; i < 3; ++i) {
      const std::string item = "item-" + std::to_string(i);
      std::vector<double> splits;
      journal->each_split_of("line1", "protein", item,
                             [&](Instant, std::int32_t, double value) { splits.push_back(value); });
      CHECK(checks_of(*journal, item) == model.standing(StoredKind::check, item));
      CHECK(splits == model.standing(StoredKind::split, item));
    }
  }

  ScratchFolder folder;
  std::mt19937 random;
  std::unique_ptr<Journal> journal;
  Model model;
  std::vector<std::string> items;  ///< keeps the texts that readings point to
};

}  // namespace

TEST_CASE("random rows, voids, rollbacks and reopenings agree with the model") {
  for (unsigned seed = 1; seed <= 8; ++seed) {
    CAPTURE(seed);
    Campaign campaign(seed);
    for (int number = 0; number < 60; ++number) campaign.batch(number);
    CHECK(campaign.journal->totals() == campaign.model.totals);
    const JournalProof proof = verify_journal(campaign.folder.path());
    CHECK(proof.faults.empty());
    CHECK(proof.head.sha256 == campaign.journal->head().sha256);
  }
}
