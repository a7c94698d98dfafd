// The book against a model that is written for clearness alone: it keeps every step ever taken and works out
// the present from them.
#include <random>

#include <doctest/doctest.h>

#include "core/alert/alert_book.hpp"
#include "core/alert/collected.hpp"
#include "tests/core/alert/harrow_mill.hpp"

using namespace agreed;
using test::at_hour;

namespace {

struct Step {
  AlertChange change{};
  bool tell = true;
  std::int64_t id = 0;
  Severity severity{};
  bool operator==(const Step&) const = default;
};

/// One (kind, subject) as the model sees it.
struct Episode {
  AlertKind kind{};
  Subject subject;
  std::int64_t id = 0;  ///< 0: never opened
  bool open = false, acknowledged = false;
  Severity severity{};
  double shift = 0;
  Instant resolved{}, told{};
};

class NaiveBook {
 public:
  NaiveBook(std::vector<std::pair<AlertKind, Subject>> keys, AlertPolicy policy) : policy_(policy) {
    for (auto& [kind, subject] : keys) {
      Episode episode;
      episode.kind = kind;
      episode.subject = subject;
      episodes_.push_back(episode);
    }
  }

  std::vector<Step> holds(std::size_t which, Severity severity, double shift, Instant now) {
    Episode& e = episodes_[which];
    if (!e.open) {
      if (e.id == 0 || now - e.resolved >= policy_.reopen_within) e.id = ++last_id_;
      e.open = true;
      e.acknowledged = false;
      e.severity = severity;
      e.shift = shift;
      e.told = now;
      return {{AlertChange::opened, true, e.id, severity}};
    }
    const bool worse = severity > e.severity;
    const bool other = worse || shift != e.shift || resolves_on_acknowledgement(e.kind);
    if (worse) e.severity = severity, e.told = now;
    e.shift = shift;
    if (!other) return {};
    return {{AlertChange::changed, worse, e.id, e.severity}};
  }

  std::vector<Step> ceases(std::size_t which, Instant now) {
    Episode& e = episodes_[which];
    if (!e.open) return {};
    e.open = false;
    e.resolved = now;
    return {{AlertChange::resolved, true, e.id, e.severity}};
  }

  std::vector<Step> acknowledge(std::size_t which, Instant now) {
    Episode& e = episodes_[which];
    if (!e.open || e.acknowledged) return {};
    e.acknowledged = true;
    std::vector<Step> steps{{AlertChange::acknowledged, true, e.id, e.severity}};
    if (resolves_on_acknowledgement(e.kind)) steps.push_back(ceases(which, now).front());
    return steps;
  }

  std::vector<Step> tick(Instant now) {
    std::vector<Step> steps;
    for (std::int64_t id = 1; id <= last_id_; ++id)
      for (auto& e : episodes_)
        if (e.id == id && e.open && !e.acknowledged && now - e.told >= policy_.remind_every) {
          e.told = now;
          steps.push_back({AlertChange::reminder, true, e.id, e.severity});
        }
    return steps;
  }

  [[nodiscard]] const Episode& at(std::size_t which) const { return episodes_[which]; }

 private:
  AlertPolicy policy_;
  std::vector<Episode> episodes_;
  std::int64_t last_id_ = 0;
};

std::vector<Step> steps_of(const std::vector<AlertTransition>& transitions) {
  std::vector<Step> steps;
  for (const auto& t : transitions) steps.push_back({t.change, t.tell, t.alert.id, t.alert.severity});
  return steps;
}

}  // namespace

TEST_CASE("random lives of alerts equal those of the naive model, also across restarts of the book") {
  const std::vector<std::pair<AlertKind, Subject>> keys = {
      {AlertKind::check_standard_unstable, {"line1", "wheat-low", "protein", "", ""}},
      {AlertKind::check_standard_unstable, {"line2", "wheat-low", "protein", "", ""}},
      {AlertKind::agreement_drifting, {"", "", "", "protein", ""}},
      {AlertKind::pair_outlier, {"", "", "", "protein", ""}},
      {AlertKind::inbox_unreachable, {"line1", "", "", "", ""}}};
  for (unsigned seed = 1; seed <= 40; ++seed) {
    CAPTURE(seed);
    std::mt19937 random(seed);
    const auto below = [&](unsigned n) { return static_cast<unsigned>(random() % n); };
    const AlertPolicy policy;
    NaiveBook model(keys, policy);
    AlertBook book(policy, test::harrow_mill(), {});
    std::map<std::int64_t, Alert> stored;
    Instant now = at_hour(0);
    int opened = 0;
    for (int i = 0; i < 500; ++i) {
      CAPTURE(i);
      now += std::chrono::minutes(below(6) == 0 ? below(2000) : below(120));
      const auto which = static_cast<std::size_t>(below(5));
      std::vector<AlertTransition> got;
      std::vector<Step> expected;
      const unsigned action = below(10);
      if (action < 5) {
        Finding finding;
        finding.kind = keys[which].first;
        finding.subject = keys[which].second;
        finding.holds = action < 3;
        finding.severity = static_cast<Severity>(below(3));
        const double shift = below(2);
        finding.details = {{"pattern", "shift"}, {"shift", shift}};
        got = book.apply(finding, now);
        expected =
            finding.holds ? model.holds(which, finding.severity, shift, now) : model.ceases(which, now);
      } else if (action < 7) {
        if (model.at(which).open) got = book.acknowledge(model.at(which).id, "M. Byrne", "", now);
        expected = model.acknowledge(which, now);
      } else if (action < 9) {
        got = book.tick(now);
        expected = model.tick(now);
      } else {
        std::vector<Alert> rows;
        for (const auto& [id, alert] : stored) rows.push_back(alert);
        book = AlertBook(policy, test::harrow_mill(), rows);
      }
      REQUIRE(steps_of(got) == expected);
      for (const auto& t : got) {
        stored.insert_or_assign(t.alert.id, t.alert);
        opened += t.change == AlertChange::opened ? 1 : 0;
      }
      std::size_t open = 0;
      for (std::size_t k = 0; k < keys.size(); ++k) open += model.at(k).open ? 1 : 0;
      REQUIRE(book.current().size() == open);
    }
    CHECK(opened > 20);
  }
}
