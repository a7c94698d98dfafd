#pragma once
// Numbers as an export writes them, to numbers as parse_result reads them.
#include <optional>
#include <string>
#include <string_view>

namespace agreed {

/// How an export writes its results, and what they are multiplied by to be in our unit.
class ResultStyle {
 public:
  /// `thousands`: what may stand between groups of three digits, empty: nothing; a space stands for the
  /// no-break and narrow spaces of Unicode too. `factor` above 0.
  ResultStyle(char decimal, std::string thousands, double factor);

  /// "<1.234,5" to "<1234.5", multiplied. A factor that is a power of ten moves the decimal sign, so nothing
  /// is rounded. A text that is no number in this style becomes "?", which is no result. `room` may be used
  /// for the text, which holds as long as it and `text` do.
  [[nodiscard]] std::string_view plain(std::string_view text, std::string& room) const;
  /// "12,34, <0,05 or >20", for messages.
  [[nodiscard]] std::string example() const;

 private:
  [[nodiscard]] bool rewrite(std::string_view text, std::string& into) const;
  [[nodiscard]] std::size_t separator_size(std::string_view text) const;
  [[nodiscard]] bool multiply(std::string& number) const;

  char decimal_;
  std::string thousands_;
  double factor_;
  std::optional<int> power_of_ten_;
};

}  // namespace agreed
