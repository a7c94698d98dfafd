#include "daemon/plan/plan.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

#include "core/plan/chart_waits.hpp"
#include "core/plan/pair_waits.hpp"
#include "daemon/plan/laws.hpp"

namespace agreed::plan {
namespace {

constexpr double kUsualSizes[] = {0.5, 1, 1.5, 2, 3};  // in sd
constexpr double kLargestSize = 10;                    // in sd; beyond it every first reading tells

void keep(const Waits& waits, StepWaits& step) {
  step.horizon = waits.horizon();
  step.half = waits.median();
  step.nine_in_ten = waits.quantile(kProofPower);
}

/// At the mean that was seen, else the reference value, else what does not depend on the level.
std::optional<double> allowable_of(const Settings& settings, const ChartSettings& chart,
                                   const SeenChart& seen) {
  const Measurand& measurand = settings.of(chart.measurand);
  if (!measurand.allowable) return std::nullopt;
  if (seen.mean) return measurand.allowable->at(*seen.mean);
  if (const auto& reference = chart.lots.back().reference) return measurand.allowable->at(reference->value);
  return measurand.allowable->absolute;
}

/// The smallest over the decision levels.
std::optional<double> allowable_of(const Measurand& measurand) {
  if (!measurand.allowable) return std::nullopt;
  std::optional<double> least;
  for (const double level : measurand.decision_levels) {
    const double at = measurand.allowable->at(level);
    if (at > 0 && !(least && *least < at)) least = at;
  }
  return least ? least : measurand.allowable->absolute;
}

class Planner {
 public:
  Planner(const Settings& settings, Seen seen, const Wishes& wishes, int trials)
      : settings_(settings), wishes_(wishes) {
    plan_.seen = std::move(seen);
    plan_.trials = trials_.count = trials;
  }

  Plan make(const Tell& tell) {
    plan_.false_alerts = false_alerts(settings_);
    plan_charts();
    plan_comparisons();
    judge_budget();
    judge_notice();
    // Pieces write into what stays where it is from here on.
    for (std::size_t i = 0; i < plan_.laws.size(); ++i) add_law(i);
    for (std::uint32_t i = 0; i < plan_.charts.size(); ++i) add_allowable({i});
    for (std::uint32_t i = 0; i < plan_.comparisons.size(); ++i) add_comparison({i});
    if (plan_.notice) add_notices(plan_.notice->streams);
    do_all(pieces_, tell);
    if (plan_.notice) conclude(*plan_.notice);
    return std::move(plan_);
  }

 private:
  // ---- What there is to work out

  void plan_charts() {
    for (std::uint32_t i = 0; i < settings_.charts.size(); ++i) {
      const ChartIndex chart{i};
      ChartPlan planned;
      planned.sd = expected_sd(settings_, chart, wishes_, plan_.seen);
      const bool known = planned.sd.source != Source::unknown;
      planned.law =
          law_of(law_model(settings_, chart, known ? std::optional(planned.sd.value) : std::nullopt));
      plan_.laws[planned.law].charts.push_back(chart);
      const auto size = allowable_of(settings_, settings_.of(chart), plan_.seen.charts[i]);
      if (known && size && *size > 0)
        planned.allowable = StepWaits{.in_sds = *size / planned.sd.value, .size = size, .allowable = true};
      plan_.charts.push_back(planned);
    }
  }

  std::size_t law_of(LawModel model) {
    const auto same =
        std::ranges::find_if(models_, [&](const LawModel& known) { return same_law(known, model); });
    const auto place = static_cast<std::size_t>(same - models_.begin());
    if (same != models_.end()) return place;
    ChartLaw law;
    for (const double size : kUsualSizes) law.steps.push_back({.in_sds = size});
    plan_.laws.push_back(std::move(law));
    models_.push_back(std::move(model));
    return place;
  }

  void plan_comparisons() {
    for (std::uint32_t i = 0; i < settings_.comparisons.size(); ++i) {
      const ComparisonIndex comparison{i};
      ComparisonPlan planned;
      planned.pairs = expected_pairs(settings_, comparison, wishes_, plan_.seen);
      for (const double size : kUsualSizes) planned.steps.push_back({.in_sds = size});
      if (planned.pairs.conditions) size_steps(settings_.of(settings_.of(comparison).measurand), planned);
      add_proofs(comparison, planned);
      plan_.comparisons.push_back(std::move(planned));
    }
  }

  static void size_steps(const Measurand& measurand, ComparisonPlan& planned) {
    const double sd = planned.pairs.conditions->sd_of_pair();
    planned.sd_of_pair = sd;
    for (StepWaits& step : planned.steps) step.size = step.in_sds * sd;
    if (const auto size = allowable_of(measurand))
      planned.steps.push_back({.in_sds = *size / sd, .size = size, .allowable = true});
  }

  void add_proofs(ComparisonIndex comparison, ComparisonPlan& planned) {
    const Measurand& measurand = settings_.of(settings_.of(comparison).measurand);
    if (measurand.decision_levels.empty()) {
      planned.no_proof = no_proof::no_decision_levels;
    } else if (!measurand.allowable) {
      planned.no_proof = no_proof::no_allowable_difference;
    } else if (!planned.pairs.conditions) {
      planned.no_proof = "sd_not_known";
    } else {
      planned.proofs.push_back({});
      if (const auto bias = largest_bias(plan_.seen.comparisons[comparison.value]))
        planned.proofs.push_back({*bias, true, {}});
    }
  }

  /// Of enough pairs to be worth a plan.
  static std::optional<double> largest_bias(const SeenComparison& seen) {
    constexpr std::int64_t kLeastPairs = 20;
    if (seen.pairs < kLeastPairs || seen.biases.empty()) return std::nullopt;
    return std::ranges::max_element(seen.biases, {}, [](const SeenBias& one) { return std::abs(one.bias); })
        ->bias;
  }

  void judge_budget() {
    if (!wishes_.false_alerts_per_year) return;
    constexpr double kRounding = 1e-6;
    BudgetAnswer answer{.wished = *wishes_.false_alerts_per_year,
                        .expected = plan_.false_alerts.per_year.value};
    answer.met = answer.expected <= answer.wished * (1 + kRounding);
    answer.budget = budget_for(settings_, answer.wished);
    if (!answer.met) answer.advice = advice_on_budget(settings_, answer.budget);
    plan_.budget = std::move(answer);
  }

  void judge_notice() {
    if (!wishes_.notice) return;
    NoticeAnswer answer{.wish = *wishes_.notice};
    for (std::uint32_t i = 0; i < settings_.analyzers.size(); ++i)
      answer.analyzers.push_back({.analyzer = {i}});
    const auto watched_by = [&](AnalyzerIndex analyzer) {
      answer.analyzers[analyzer.value].streams.push_back(answer.streams.size() - 1);
    };
    for (std::uint32_t i = 0; i < settings_.charts.size(); ++i) {
      if (settings_.charts[i].measurand != answer.wish.measurand) continue;
      answer.streams.push_back(stream_of(ChartIndex{i}));
      watched_by(settings_.charts[i].analyzer);
    }
    for (std::uint32_t i = 0; i < settings_.comparisons.size(); ++i) {
      if (settings_.comparisons[i].measurand != answer.wish.measurand) continue;
      answer.streams.push_back(stream_of(ComparisonIndex{i}));
      watched_by(settings_.comparisons[i].x);
      watched_by(settings_.comparisons[i].y);
    }
    std::erase_if(answer.analyzers, [](const AnalyzerNotice& one) { return one.streams.empty(); });
    plan_.notice = std::move(answer);
  }

  [[nodiscard]] StreamNotice stream_of(ChartIndex chart) const {
    const ChartPlan& planned = plan_.charts[chart.value];
    StreamNotice stream{.stream = {chart, std::nullopt}, .sd = planned.sd.value};
    const ChartSettings& of = settings_.of(chart);
    if (planned.sd.source == Source::unknown)
      stream.missing = settings_.of(of.analyzer).id + "/" + settings_.of(of.measurand).id;
    return stream;
  }

  [[nodiscard]] StreamNotice stream_of(ComparisonIndex comparison) const {
    const ComparisonPlan& planned = plan_.comparisons[comparison.value];
    return {.stream = {std::nullopt, comparison},
            .notice = {},
            .missing = planned.pairs.missing,
            .sd = planned.sd_of_pair.value_or(0),
            .advice = {}};
  }

  // ---- The pieces of work

  void add_run(const LawModel& model, StepWaits& step) {
    const double size = std::min(step.in_sds, kLargestSize) * model.sd;
    pieces_.emplace_back([this, &model, &step, size](const Tell& tell) {
      TrialRun run(chart_trial(model.settings, model.chart, {size, model.sd, kReadingsBefore}), trials_);
      while (run.step()) tell(run.share_done());
      keep(run.waits(), step);
    });
  }

  void add_law(std::size_t law) {
    for (StepWaits& step : plan_.laws[law].steps) add_run(models_[law], step);
  }

  void add_allowable(ChartIndex chart) {
    ChartPlan& planned = plan_.charts[chart.value];
    if (planned.allowable) add_run(models_[planned.law], *planned.allowable);
  }

  void add_comparison(ComparisonIndex comparison) {
    ComparisonPlan& planned = plan_.comparisons[comparison.value];
    for (StepWaits& step : planned.steps)
      pieces_.emplace_back([this, comparison, &planned, &step](const Tell& tell) {
        const auto simulate = [&](const Settings& settings, const PairConditions& conditions) {
          const double sd = conditions.sd_of_pair();
          PairWaits waits(settings, comparison, conditions, {step.in_sds * sd, kPairsBefore}, trials_);
          while (waits.step()) tell(waits.share_done());
          keep(waits.either(), step);
          step.half_drifting = waits.drifting().median();
          if (waits.may_be_lost()) step.half_lost = waits.lost().median();
        };
        if (planned.pairs.conditions) {
          simulate(settings_, *planned.pairs.conditions);
        } else {
          const UnitPairs unit = unit_pairs(settings_, comparison);
          simulate(unit.settings, unit.conditions);
        }
      });
    for (ProofPlanned& proof : planned.proofs)
      pieces_.emplace_back([this, comparison, &planned, &proof](const Tell& tell) {
        ProofSearch search(settings_, comparison, *planned.pairs.conditions, {kProofPower, proof.bias},
                           trials_);
        while (search.step()) tell(search.share_done());
        proof.needs = search.needs();
      });
  }

  void add_notice(StreamNotice& stream) {
    if (!stream.missing.empty()) return;
    pieces_.emplace_back([this, &stream](const Tell& tell) {
      const NoticeWish& wish = wishes_.notice->wish;
      NoticeSearch search =
          stream.stream.chart
              ? NoticeSearch(settings_, *stream.stream.chart, stream.sd, kReadingsBefore, wish, trials_)
              : NoticeSearch(settings_, *stream.stream.comparison,
                             *plan_.comparisons[stream.stream.comparison->value].pairs.conditions,
                             kPairsBefore, wish, trials_);
      while (search.step()) tell(search.share_done());
      stream.notice = search.notice();
    });
  }

  /// Those of charts alike are searched once.
  void add_notices(std::vector<StreamNotice>& streams) {
    same_as_.resize(streams.size());
    for (std::size_t i = 0; i < streams.size(); ++i) {
      std::size_t& same = same_as_[i];
      while (same < i && !alike(streams[same], streams[i])) ++same;
      if (same == i) add_notice(streams[i]);
    }
  }

  [[nodiscard]] bool alike(const StreamNotice& a, const StreamNotice& b) const {
    if (!a.stream.chart || !b.stream.chart || !a.missing.empty() || !b.missing.empty()) return false;
    const ChartIndex one = *a.stream.chart, other = *b.stream.chart;
    return plan_.charts[one.value].law == plan_.charts[other.value].law &&
           models_[plan_.charts[one.value].law].in_sds &&
           settings_.of(one).own_run_length == settings_.of(other).own_run_length && a.sd == b.sd;
  }

  void conclude(NoticeAnswer& answer) const {
    for (std::size_t i = 0; i < answer.streams.size(); ++i)
      if (same_as_[i] != i) answer.streams[i].notice = answer.streams[same_as_[i]].notice;
    for (StreamNotice& stream : answer.streams)
      if (stream.notice && !stream.notice->met)
        stream.advice = advice_on_notice(settings_, stream.stream, *stream.notice);
    for (AnalyzerNotice& analyzer : answer.analyzers)
      analyzer.met = std::ranges::any_of(analyzer.streams, [&](std::size_t i) {
        return answer.streams[i].notice && answer.streams[i].notice->met;
      });
  }

  const Settings& settings_;
  const Wishes& wishes_;
  Trials trials_;
  Plan plan_;
  std::vector<LawModel> models_;      ///< as plan_.laws
  std::vector<std::size_t> same_as_;  ///< of each stream of the notice: the first one like it
  std::vector<Piece> pieces_;
};

}  // namespace

bool NoticeAnswer::met() const {
  return !analyzers.empty() && std::ranges::all_of(analyzers, &AnalyzerNotice::met);
}

bool Plan::all_met() const {
  return (!budget || budget->met) && (!notice || notice->met());
}

std::vector<StepWaits> steps_of(const Plan& plan, ChartIndex chart) {
  const ChartPlan& planned = plan.charts.at(chart.value);
  std::vector<StepWaits> steps = plan.laws.at(planned.law).steps;
  if (planned.sd.source != Source::unknown)
    for (StepWaits& step : steps) step.size = step.in_sds * planned.sd.value;
  if (planned.allowable) steps.push_back(*planned.allowable);
  return steps;
}

Plan make_plan(const Settings& settings, Seen seen, const Wishes& wishes, int trials, const Tell& tell) {
  return Planner(settings, std::move(seen), wishes, trials).make(tell);
}

}  // namespace agreed::plan
