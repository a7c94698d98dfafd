#include "core/base/finding.hpp"

#include <algorithm>
#include <array>

namespace agreed {
namespace {

// In the order of the enumeration.
constexpr std::array<const char*, 16> kKinds = {
    "check_standard_unstable", "check_standard_biased", "agreement_lost", "agreement_drifting",
    "agreement_unproven",      "sample_scatter",        "pair_outlier",   "check_overdue",
    "pairs_overdue",           "results_silent",        "file_rejected",  "readings_conflict",
    "unpaired_samples",        "inbox_unreachable",     "storage_low",    "delivery_failing"};
constexpr std::array<const char*, 3> kSeverities = {"notice", "warning", "critical"};

template <class Enum, std::size_t N>
std::optional<Enum> find_name(const std::array<const char*, N>& names, const std::string& name) {
  const auto found = std::find(names.begin(), names.end(), name);
  if (found == names.end()) return std::nullopt;
  return static_cast<Enum>(found - names.begin());
}

}  // namespace

const char* to_string(AlertKind kind) {
  return kKinds.at(static_cast<std::size_t>(kind));
}
const char* to_string(Severity severity) {
  return kSeverities.at(static_cast<std::size_t>(severity));
}
std::vector<AlertKind> all_alert_kinds() {
  std::vector<AlertKind> kinds;
  for (std::size_t i = 0; i < kKinds.size(); ++i) kinds.push_back(static_cast<AlertKind>(i));
  return kinds;
}
std::optional<AlertKind> alert_kind_from(const std::string& name) {
  return find_name<AlertKind>(kKinds, name);
}
std::optional<Severity> severity_from(const std::string& name) {
  return find_name<Severity>(kSeverities, name);
}

}  // namespace agreed
