#include "core/pair/agreement_record.hpp"

#include <algorithm>

namespace agreed {
namespace {
constexpr std::size_t kRunsKept = 1000;
}

void AgreementRecord::shown(const PairMark& pair, bool anew) {
  if (anew || runs_.empty()) {
    runs_.push_back({pair, pair});
    if (runs_.size() > kRunsKept) runs_.pop_front();
  }
  runs_.back().last = pair;
}

std::optional<AgreementRun> AgreementRecord::run_before(Instant at) const {
  const auto found =
      std::find_if(runs_.rbegin(), runs_.rend(), [at](const AgreementRun& run) { return run.first.at < at; });
  return found == runs_.rend() ? std::nullopt : std::optional(*found);
}

}  // namespace agreed
