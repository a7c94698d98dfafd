#include "core/pair/comparison_view.hpp"

namespace agreed {

const char* to_string(Moved moved) {
  switch (moved) {
    case Moved::x:
      return "x";
    case Moved::y:
      return "y";
    case Moved::both:
      return "both";
    case Moved::neither:
      return "neither";
    case Moved::undecided:
      return "undecided";
  }
  return "";
}

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
