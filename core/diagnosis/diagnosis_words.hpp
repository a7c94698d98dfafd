#pragma once
// The evidence of a diagnosis in plain words: numbers with units, and what they rest on. Inside
// core/diagnosis only.
#include <optional>
#include <string>

#include "core/diagnosis/diagnosis.hpp"

namespace agreed {

class DiagnosisWords {
 public:
  DiagnosisWords(const Settings& settings, ComparisonIndex comparison);

  [[nodiscard]] std::string no_moment() const;
  [[nodiscard]] std::string too_few_pairs(const DiagnosisView& view) const;
  [[nodiscard]] std::string decided(const DiagnosisView& view) const;
  [[nodiscard]] std::string undecided(const DiagnosisView& view, Moved most_probable,
                                      const std::optional<MoreReadings>& more) const;

 private:
  [[nodiscard]] std::string amount(double value) const;
  [[nodiscard]] std::string start(const DiagnosisView& view) const;
  [[nodiscard]] std::string pairs(const DiagnosisView& view) const;
  [[nodiscard]] std::string checks(const std::string& analyzer, const std::optional<double>& shift,
                                   const std::optional<double>& se, int before, int after) const;
  [[nodiscard]] std::string all_checks(const DiagnosisView& view) const;
  [[nodiscard]] std::string who(Moved moved) const;
  [[nodiscard]] std::string what_decides(const std::optional<MoreReadings>& more) const;

  std::string x_, y_, unit_;
  std::optional<int> decimals_;
};

}  // namespace agreed
