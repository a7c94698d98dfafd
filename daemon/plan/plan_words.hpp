#pragma once
// The small words of a plan: figures with their errors, spans of time, lines of a table.
#include <optional>
#include <string>

#include "core/base/instant.hpp"
#include "core/plan/waits.hpp"

namespace agreed::plan {

inline constexpr std::size_t kWidth = 80, kLabel = 11;

/// "66 +- 3", "4.2 +- 0.1"; an exact one without error; as many decimals as the error bears.
[[nodiscard]] std::string with_error(const Simulated& figure);
/// In per cent: "92.1 +- 0.9 %".
[[nodiscard]] std::string percent_with_error(const Simulated& share);
/// "40 min", "8 h", "2.5 h", "4.7 days", "22 days".
[[nodiscard]] std::string span_words(std::chrono::duration<double> span);
/// So many readings, as time.
[[nodiscard]] std::string span_words(double readings, Duration every);

/// Text of at most 80 columns, words longer than that aside: a label, and to its right what it is about.
class Paper {
 public:
  /// A heading, after an empty line.
  void heading(const std::string& text);
  /// `text` flows into as many lines as it needs.
  void row(const std::string& label, const std::string& text);
  /// As it is.
  void line(const std::string& text) { text_ += text + '\n'; }
  [[nodiscard]] std::string take() { return std::move(text_); }

 private:
  std::string text_;
};

}  // namespace agreed::plan
