// What a plant lives through, told by the monitor and the alert book together in virtual time: which alerts,
// how many, how soon. Errors are drawn with fixed seeds, so the counts are exact; the seeds are such that the
// false alerts that the budget allows (see the last case) come in none of the ordinary times.
#include <algorithm>
#include <functional>
#include <map>

#include "core/alert/alert_book.hpp"
#include "tests/core/monitor/mill.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {
constexpr double kError = 0.02;      // sd of a single result
constexpr double kBefore = 24 * 40;  // hours of ordinary life before anything happens
constexpr std::uint32_t kLine1 = 0, kLine2 = 1;

/// The mill of the demo, with the run lengths that 6 false alerts a year give it.
std::shared_ptr<const Settings> demo_mill() {
  auto settings = std::make_shared<Settings>(*harrow_mill());
  for (ChartSettings& chart : settings->charts) chart.level_run_length = chart.precision_run_length = 3650;
  ComparisonSettings& comparison = settings->comparisons[0];
  comparison.window_pairs = 200;
  comparison.warning_run_length = 7300;
  comparison.outlier_run_length = comparison.scatter_run_length = 14600;
  return settings;
}

struct Told {
  AlertKind kind{};
  Subject subject;
  AlertChange change{};
  Severity severity{};
  double hour = 0;
};

/// Two analyzers, checks every 8 hours, a split sample every 2, fed event by event.
class Life {
 public:
  using Extra = std::function<double(std::uint32_t analyzer, double hour)>;

  explicit Life(unsigned seed)
      : random_(seed),
        settings_(demo_mill()),
        record_(*settings_),
        monitor_(settings_),
        book_(AlertPolicy{}, settings_, {}) {}

  Extra moved = [](std::uint32_t, double) { return 0.0; };         ///< of everything an analyzer measures
  Extra sample_moved = [](std::uint32_t, double) { return 0.0; };  ///< of split samples only
  Extra noise = [](std::uint32_t, double) { return 1.0; };         ///< times the sd
  std::function<bool(std::uint32_t, double)> silent = [](std::uint32_t, double) { return false; };

  void until(double end) {
    for (; now_ < end; now_ += 2) {
      std::vector<Event> batch;
      if (static_cast<int>(now_) % 8 == 0) add_checks(batch);
      add_split(batch);
      take(std::move(batch));
    }
  }
  void intervene(std::uint32_t analyzer, InterventionKind kind) {
    take({Intervention{hour(now_), {analyzer}, {}, {}, kind, ""}});
  }

  [[nodiscard]] double now() const { return now_; }
  [[nodiscard]] const Monitor& monitor() const { return monitor_; }
  [[nodiscard]] Verdict verdict() const { return monitor_.comparison({0}).verdict(); }

  /// Those told with `change`, by kind and subject.
  [[nodiscard]] int count(AlertKind kind, AlertChange change = AlertChange::opened,
                          const std::string& analyzer = "") const {
    return static_cast<int>(std::count_if(told.begin(), told.end(), [&](const Told& t) {
      return t.kind == kind && t.change == change && (analyzer.empty() || t.subject.analyzer == analyzer);
    }));
  }
  [[nodiscard]] int opened() const {
    return static_cast<int>(std::count_if(told.begin(), told.end(),
                                          [](const Told& t) { return t.change == AlertChange::opened; }));
  }
  /// Hours from `since` until the first of the kind was told.
  [[nodiscard]] double hours_until(AlertKind kind, double since, Severity at_least = Severity::notice) const {
    for (const Told& t : told)
      if (t.kind == kind && t.severity >= at_least && t.hour >= since && t.change != AlertChange::resolved)
        return t.hour - since;
    return 1e9;
  }

  std::vector<Told> told;

 private:
  void add_checks(std::vector<Event>& batch) {
    for (std::uint32_t a : {kLine1, kLine2})
      for (std::uint32_t s : {0U, 1U}) {
        const double value = (s == 0 ? 13.41 : 10.62) + error(a, now_) + moved(a, now_);
        if (!silent(a, now_)) batch.emplace_back(CheckReading{hour(now_), {a}, {s}, {0}, 0, value});
      }
  }
  void add_split(std::vector<Event>& batch) {
    const double truth = product_(random_), at = now_ + 0.5;
    const std::string sample = "S-" + std::to_string(++samples_);
    for (std::uint32_t a : {kLine1, kLine2}) {
      const double value = truth + error(a, at) + moved(a, at) + sample_moved(a, at);
      if (!silent(a, at)) batch.emplace_back(SplitReading{hour(at), {a}, sample, {0}, 0, value});
    }
  }
  double error(std::uint32_t analyzer, double at) { return kError * noise(analyzer, at) * normal_(random_); }

  void take(std::vector<Event> batch) {
    record_.add(batch);
    const MonitorOutcome outcome = monitor_.apply(std::move(batch), record_);
    for (const Finding& finding : outcome.findings)
      for (const AlertTransition& t : book_.apply(finding, hour(now_)))
        if (t.tell) told.push_back({t.alert.kind, t.alert.subject, t.change, t.alert.severity, now_});
  }

  std::mt19937 random_;
  std::normal_distribution<double> normal_;
  std::uniform_real_distribution<double> product_{10.0, 13.6};
  std::shared_ptr<const Settings> settings_;
  Record record_;
  Monitor monitor_;
  AlertBook book_;
  double now_ = 0;
  int samples_ = 0;
};

auto step_of(std::uint32_t analyzer, double size, double from) {
  return [=](std::uint32_t a, double at) { return a == analyzer && at >= from ? size : 0.0; };
}
}  // namespace

TEST_CASE("an ordinary quarter of a year tells nothing") {
  Life life(1);
  life.until(24 * 91);
  CHECK(life.opened() == 0);
  CHECK(life.verdict() == Verdict::agreement_shown);
}

TEST_CASE("a step on one analyzer is told by both of its standards and by the pairs, within a day") {
  Life life(2);
  life.until(kBefore);
  REQUIRE(life.opened() == 0);
  life.moved = step_of(kLine2, 0.08, kBefore);
  life.until(kBefore + 24 * 20);
  CHECK(life.count(AlertKind::check_standard_unstable, AlertChange::opened, "line2") == 2);
  CHECK(life.count(AlertKind::check_standard_unstable, AlertChange::opened, "line1") == 0);
  CHECK(life.count(AlertKind::agreement_drifting) == 1);
  CHECK(life.opened() == 3);
  CHECK(life.hours_until(AlertKind::check_standard_unstable, kBefore) <= 24);
  CHECK(life.hours_until(AlertKind::agreement_drifting, kBefore, Severity::critical) <= 24);
  // The step is less than half of what is allowable: the means still agree.
  CHECK(life.verdict() == Verdict::agreement_shown);
}

TEST_CASE("a step beyond what is allowable loses the agreement") {
  Life life(3);
  life.until(kBefore);
  REQUIRE(life.opened() == 0);
  life.moved = step_of(kLine2, 0.3, kBefore);
  life.until(kBefore + 24 * 5);
  CHECK(life.count(AlertKind::agreement_lost) == 1);
  CHECK(life.verdict() == Verdict::disagreement_shown);
  CHECK(life.hours_until(AlertKind::agreement_lost, kBefore) <= 48);
}

TEST_CASE("a slow drift is told long before it does harm") {
  Life life(14);
  life.until(kBefore);
  REQUIRE(life.opened() == 0);
  const double a_day = 0.004;  // a fifth of the sd; 50 days to the allowable difference
  life.moved = [=](std::uint32_t a, double at) {
    return a == kLine2 && at > kBefore ? a_day * (at - kBefore) / 24 : 0.0;
  };
  life.until(kBefore + 24 * 25);
  const double told = life.hours_until(AlertKind::agreement_drifting, kBefore);
  MESSAGE("drift told after " << told / 24 << " days");
  CHECK(told < 24 * 12);
  CHECK(life.count(AlertKind::check_standard_unstable, AlertChange::opened, "line2") == 2);
  CHECK(life.count(AlertKind::check_standard_unstable, AlertChange::opened, "line1") == 0);
  CHECK(life.count(AlertKind::agreement_lost) == 0);
}

TEST_CASE("a lamp change with recalibration is a new stretch and no alert") {
  Life life(35);
  life.until(kBefore);
  REQUIRE(life.opened() == 0);
  life.intervene(kLine2, InterventionKind::consumable_changed);
  life.intervene(kLine2, InterventionKind::recalibrated);
  life.moved = step_of(kLine2, 0.05, kBefore);
  life.until(kBefore + 24 * 30);
  CHECK(life.opened() == 0);
  CHECK(life.verdict() == Verdict::agreement_shown);
}

TEST_CASE("when both drift together the charts tell and the pairs do not") {
  Life life(6);
  life.until(kBefore);
  REQUIRE(life.opened() == 0);
  life.moved = [](std::uint32_t, double at) { return at >= kBefore ? 0.08 : 0.0; };
  life.until(kBefore + 24 * 20);
  CHECK(life.count(AlertKind::check_standard_unstable) == 4);
  CHECK(life.opened() == 4);
  CHECK(life.verdict() == Verdict::agreement_shown);
}

TEST_CASE("samples that the analyzers read differently are told by the pairs alone") {
  Life life(18);
  life.until(kBefore);
  REQUIRE(life.opened() == 0);
  life.sample_moved = step_of(kLine2, 0.08, kBefore);
  life.until(kBefore + 24 * 10);
  CHECK(life.count(AlertKind::check_standard_unstable) == 0);
  CHECK(life.count(AlertKind::agreement_drifting) == 1);
  CHECK(life.opened() == 1);
}

TEST_CASE("while an analyzer is silent nothing is concluded") {
  Life life(8);
  life.until(kBefore);
  REQUIRE(life.opened() == 0);
  const auto before = life.monitor().comparison({0}).view();
  life.silent = [](std::uint32_t a, double) { return a == kLine2; };
  life.until(kBefore + 24 * 3);
  CHECK(life.opened() == 0);
  CHECK(life.monitor().comparison({0}).view() == before);
  CHECK(life.monitor().waiting({0}) == 36);
  life.silent = [](std::uint32_t, double) { return false; };
  life.until(kBefore + 24 * 10);
  CHECK(life.opened() == 0);
}

TEST_CASE("a noisy hour is one single reading of each standard and pairs set aside") {
  Life life(9);
  life.until(kBefore);
  REQUIRE(life.opened() == 0);
  life.noise = [](std::uint32_t a, double at) { return a == kLine1 && at < kBefore + 1 ? 15.0 : 1.0; };
  life.until(kBefore + 24 * 10);
  CHECK(life.count(AlertKind::check_standard_unstable, AlertChange::opened, "line1") == 2);
  CHECK(life.count(AlertKind::check_standard_unstable, AlertChange::resolved, "line1") == 2);
  CHECK(life.count(AlertKind::pair_outlier) == 1);
  CHECK(life.opened() == 3);
}

TEST_CASE("ordinary quarters of a year keep to the alarm budget") {
  constexpr int kLives = 12;
  int opened = 0;
  for (unsigned seed = 100; seed < 100 + kLives; ++seed) {
    Life life(seed);
    life.until(24 * 91);
    opened += life.opened();
    CHECK(life.count(AlertKind::agreement_lost) == 0);
  }
  // Four charts of two scores, 273 readings each; 1,092 pairs for the pair chart's warning and the outliers.
  const double promised = kLives * (4 * 2 * 273 / 3650.0 + 1092 / 7300.0 + 1092 / 14600.0);
  MESSAGE(opened << " alerts, " << promised << " promised at most");
  CHECK(opened < promised + 3 * std::sqrt(promised));
  CHECK(opened > promised / 4);
}
