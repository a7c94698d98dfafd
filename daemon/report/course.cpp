#include "daemon/report/course.hpp"

#include <algorithm>
#include <span>
#include <utility>

#include "core/monitor/monitor.hpp"
#include "core/replay/event_log.hpp"
#include "daemon/engine/journal_events.hpp"

namespace agreed {
namespace {

// A view holds the newest 500 pairs; they are read off before that many new ones came.
constexpr std::int64_t kReadOff = 400;

template <class State>
void go_on(std::vector<Spell<State>>& spells, State state, Instant at) {
  if (spells.back().state == state) return;
  spells.back().to = at;
  if (spells.back().from == at) spells.pop_back();
  if (!spells.empty() && spells.back().state == state) return;  // back within one moment
  spells.push_back({state, at, at});
}

class PeriodFold {
 public:
  PeriodFold(JournalReader& reader, std::shared_ptr<const Settings> settings, const ReportPeriod& period)
      : settings_(std::move(settings)),
        period_(period),
        history_(settings_, journal_events(reader, *settings_)),
        monitor_(settings_),
        read_off_(settings_->comparisons.size()) {}

  PeriodCourse run() {
    const std::vector<Event>& events = history_.events();
    const auto up_to = [&](auto from, Instant until) {
      return std::find_if(from, events.end(),
                          [until](const Event& event) { return time_of(event) >= until; });
    };
    auto first = up_to(events.begin(), period_.from);
    history_.know(static_cast<std::size_t>(first - events.begin()));
    monitor_.fold_all(history_);
    begin();
    for (const auto end = up_to(first, period_.to); first != end;) {
      const Instant at = time_of(*first);
      const auto last = up_to(first, at + Duration(1));
      history_.know(static_cast<std::size_t>(last - events.begin()));
      take({first, last}, at);
      first = last;
    }
    end();
    return std::move(course_);
  }

 private:
  /// Up to which pair the course of a comparison has them already, and how many came since.
  struct ReadOff {
    std::optional<std::pair<Instant, std::string>> last;
    std::int64_t since = 0;
  };

  void begin() {
    for (std::uint32_t i = 0; i < settings_->comparisons.size(); ++i) {
      const Comparison& comparison = monitor_.comparison(ComparisonIndex{i});
      course_.comparisons.push_back({{{comparison.verdict(), period_.from, period_.to}}, {}, {}});
      const ComparisonView view = comparison.view();
      if (!view.pairs.empty())
        read_off_[i].last.emplace(view.pairs.back().measured_at, view.pairs.back().sample);
    }
    for (std::uint32_t i = 0; i < settings_->charts.size(); ++i)
      course_.charts.push_back({{{monitor_.chart(ChartIndex{i}).state(), period_.from, period_.to}}, 0, {}});
  }

  void take(std::vector<Event> moment, Instant at) {
    for (const Event& event : moment)
      if (const auto* check = std::get_if<CheckReading>(&event))
        if (const auto chart = monitor_.find_chart(check->analyzer, check->standard, check->measurand))
          ++course_.charts[chart->value].readings;
    const MonitorOutcome outcome = monitor_.apply(std::move(moment), history_);
    for (const ChartIndex index : outcome.charts_changed)
      go_on(course_.charts[index.value].states, monitor_.chart(index).state(), at);
    for (const ComparisonIndex index : outcome.comparisons_changed) {
      go_on(course_.comparisons[index.value].verdicts, monitor_.comparison(index).verdict(), at);
      if (outcome.comparisons_paired.contains(index) && ++read_off_[index.value].since >= kReadOff)
        read_off(index);
    }
  }

  void read_off(ComparisonIndex index) {
    ComparisonCourse& course = course_.comparisons[index.value];
    ReadOff& known = read_off_[index.value];
    known.since = 0;
    course.end = monitor_.comparison(index).view();
    const auto& points = course.end.bias_history;
    for (const PairView& pair : course.end.pairs) {
      const std::pair key{pair.measured_at, pair.sample};
      if (known.last && key <= *known.last) continue;
      CoursePair taken{pair, verdict_at(course, pair.measured_at), {}};
      const auto point = std::find_if(points.rbegin(), points.rend(),
                                      [&](const BiasPoint& p) { return p.at == pair.measured_at; });
      if (point != points.rend()) taken.levels = point->levels;
      course.pairs.push_back(std::move(taken));
      known.last = key;
    }
  }

  [[nodiscard]] static Verdict verdict_at(const ComparisonCourse& course, Instant at) {
    Verdict verdict = course.verdicts.front().state;
    for (const Spell<Verdict>& spell : course.verdicts)
      if (spell.from <= at) verdict = spell.state;
    return verdict;
  }

  void end() {
    for (std::uint32_t i = 0; i < settings_->comparisons.size(); ++i) {
      const ComparisonIndex index{i};
      read_off(index);
      ComparisonCourse& course = course_.comparisons[i];
      course.verdicts.back().to = period_.to;
      course.end.waiting = monitor_.waiting(index);
      if (const auto change = monitor_.explain(index)) {
        course.end.diagnosis = change->diagnosis;
        course.end.look_back = change->look_back;
      }
    }
    for (std::uint32_t i = 0; i < settings_->charts.size(); ++i) {
      course_.charts[i].states.back().to = period_.to;
      course_.charts[i].end = monitor_.chart(ChartIndex{i}).view();
    }
  }

  std::shared_ptr<const Settings> settings_;
  ReportPeriod period_;
  EventLog history_;
  Monitor monitor_;
  PeriodCourse course_;
  std::vector<ReadOff> read_off_;
};

}  // namespace

PeriodCourse course_of(JournalReader& reader, const std::shared_ptr<const Settings>& settings,
                       const ReportPeriod& period) {
  return PeriodFold(reader, settings, period).run();
}

}  // namespace agreed
