#pragma once
// While somebody works on an analyzer its alerts are not sent: for a time after each intervention, and during
// planned maintenance. They are recorded all the same, and sent afterwards if they are still open.
#include <string>
#include <vector>

#include "core/base/event.hpp"
#include "core/base/finding.hpp"
#include "core/base/settings.hpp"

namespace agreed {

/// Planned work on an analyzer.
struct Maintenance {
  AnalyzerIndex analyzer;
  Instant from{}, to{};
};

class Holds {
 public:
  /// `after`: how long an intervention holds; zero: not at all.
  Holds(std::vector<Maintenance> planned, Duration after) : windows_(std::move(planned)), after_(after) {}

  /// `noted` and `level_accepted` are no work on the analyzer and hold nothing.
  void add(const Intervention& intervention);

  /// Whether alerts about this subject are held now: it is, or compares, an analyzer that is worked on.
  [[nodiscard]] bool held(const Subject& subject, const Settings& settings, Instant now) const;

 private:
  [[nodiscard]] bool held(const std::string& analyzer, const Settings& settings, Instant now) const;

  std::vector<Maintenance> windows_;
  Duration after_;
};

}  // namespace agreed
