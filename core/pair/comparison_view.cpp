#include "core/pair/comparison_view.hpp"

namespace agreed {

const char* to_string(Verdict verdict) {
  switch (verdict) {
    case Verdict::gathering:
      return "gathering";
    case Verdict::inconclusive:
      return "inconclusive";
    case Verdict::agreement_shown:
      return "agreement_shown";
    case Verdict::disagreement_shown:
      return "disagreement_shown";
  }
  return "";
}

const char* to_string(PairChartState state) {
  switch (state) {
    case PairChartState::learning:
      return "learning";
    case PairChartState::stable:
      return "stable";
    case PairChartState::unstable:
      return "unstable";
  }
  return "";
}

}  // namespace agreed
