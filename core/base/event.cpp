#include "core/base/event.hpp"

#include <tuple>

namespace agreed {
namespace {

int rank(const Event& event) {
  if (std::holds_alternative<Intervention>(event)) return 0;
  return std::holds_alternative<CheckReading>(event) ? 1 : 2;
}

bool before(const CheckReading& a, const CheckReading& b) {
  return std::tie(a.analyzer, a.standard, a.measurand, a.replicate) <
         std::tie(b.analyzer, b.standard, b.measurand, b.replicate);
}
bool before(const SplitReading& a, const SplitReading& b) {
  return std::tie(a.analyzer, a.sample, a.measurand, a.replicate) <
         std::tie(b.analyzer, b.sample, b.measurand, b.replicate);
}
bool before(const Intervention& a, const Intervention& b) {
  return std::tie(a.analyzer, a.standard, a.measurand, a.kind) <
         std::tie(b.analyzer, b.standard, b.measurand, b.kind);
}

AnalyzerIndex analyzer_of(const Event& event) {
  return std::visit([](const auto& e) { return e.analyzer; }, event);
}

}  // namespace

Instant time_of(const Event& event) {
  return std::visit(
      [](const auto& e) {
        if constexpr (requires { e.measured_at; })
          return e.measured_at;
        else
          return e.at;
      },
      event);
}

bool happens_before(const Event& a, const Event& b) {
  const auto time_a = time_of(a), time_b = time_of(b);
  if (time_a != time_b) return time_a < time_b;
  const bool intervention_a = rank(a) == 0, intervention_b = rank(b) == 0;
  if (intervention_a != intervention_b) return intervention_a;
  const auto analyzer_a = analyzer_of(a), analyzer_b = analyzer_of(b);
  if (analyzer_a != analyzer_b) return analyzer_a < analyzer_b;
  if (a.index() != b.index()) return rank(a) < rank(b);
  return std::visit(
      [&b](const auto& event) { return before(event, std::get<std::decay_t<decltype(event)>>(b)); }, a);
}

}  // namespace agreed
