#pragma once
// Halves of split samples whose partner does not come. Pure: results and when they came go in, findings come
// out.
//
// A half is told of once, when `pair_within` has passed since its first result was received and no comparison
// it is part of has a partner for it. (A sample that was meant for two of three analyzers is not lonely.)
#include <deque>
#include <functional>
#include <set>
#include <string>
#include <tuple>
#include <vector>

#include "core/base/event.hpp"
#include "core/base/finding.hpp"
#include "core/base/settings.hpp"

namespace agreed {

class LonelyHalves {
 public:
  /// So many halves are remembered; beyond, the oldest is not told of.
  static constexpr std::size_t kCapacity = 20'000;
  /// Whether the half has no partner in a comparison, as the monitor knows (Monitor::lacks_partner).
  using LacksPartner = std::function<bool(ComparisonIndex, const SplitReading&)>;

  /// `settings` must outlive this.
  explicit LonelyHalves(const Settings& settings) : settings_(settings) {}

  /// A result was taken in at `received`.
  void add(const SplitReading& result, Instant received);
  /// To be called when the monitor has folded what was added: of those, only halves without a partner are
  /// kept.
  void settle(const LacksPartner& lacks_partner);
  /// A finding for each analyzer with halves whose time has passed at `now`, their samples in
  /// `details.items`. They are forgotten, told or not.
  [[nodiscard]] std::vector<Finding> due(Instant now, const LacksPartner& lacks_partner);
  /// Whether the time of any half has passed at `now`; its partner may have come since.
  [[nodiscard]] bool any_due(Instant now) const;
  void clear();

 private:
  using Key = std::tuple<AnalyzerIndex, MeasurandIndex, std::string>;
  struct Waiting {
    SplitReading result;
    Instant last{};  ///< until then its partner is in time
  };
  [[nodiscard]] static Key key_of(const SplitReading& result);
  [[nodiscard]] bool is_lonely(const SplitReading& result, const LacksPartner& lacks_partner) const;
  [[nodiscard]] bool is_part_of(const SplitReading& result, const ComparisonSettings& comparison) const;

  const Settings& settings_;
  std::deque<Waiting> waiting_;  ///< in order of receipt
  std::size_t unsettled_ = 0;    ///< the newest so many
  std::set<Key> known_;          ///< of those waiting: a replicate that comes later starts no new wait
};

}  // namespace agreed
