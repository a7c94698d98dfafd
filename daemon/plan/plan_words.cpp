#include "daemon/plan/plan_words.hpp"

#include <algorithm>
#include <cmath>
#include <sstream>
#include <vector>

#include "core/base/number_text.hpp"
#include "core/base/utf8.hpp"

namespace agreed::plan {
namespace {

/// Decimals that an error bears: its first digit, or its second where the first is a 1.
int decimals_for(double error) {
  return std::clamp(-static_cast<int>(std::floor(std::log10(error / 1.95))), 0, 6);
}

std::size_t columns_of(std::string_view text) {
  std::size_t count = 0;
  for (; !text.empty(); ++count) text.remove_prefix(std::max<std::size_t>(1, utf8_length(text)));
  return count;
}

std::vector<std::string> flowing(const std::string& text, std::size_t width) {
  std::vector<std::string> lines(1);
  std::istringstream words(text);
  for (std::string word; words >> word;) {
    std::string& line = lines.back();
    if (line.empty())
      line = word;
    else if (columns_of(line) + 1 + columns_of(word) <= width)
      line += " " + word;
    else
      lines.push_back(word);
  }
  return lines;
}

/// Below ten of a unit one decimal, unless it is whole anyway.
std::string of_unit(double count, const char* one, const char* many) {
  const double tenths = std::round(count * 10) / 10;
  const bool whole = count >= 10 || tenths == std::round(tenths);
  const std::string number = fixed(count, whole ? 0 : 1);
  return number + " " + (number == "1" ? one : many);
}

}  // namespace

std::string with_error(const Simulated& figure) {
  if (!(figure.standard_error > 0)) return significant(figure.value, 3);
  const int decimals = decimals_for(figure.standard_error);
  return fixed(figure.value, decimals) + " +- " + fixed(figure.standard_error, decimals);
}

std::string percent_with_error(const Simulated& share) {
  return with_error({100 * share.value, 100 * share.standard_error}) + " %";
}

std::string span_words(std::chrono::duration<double> span) {
  const double minutes = span.count() / 60, hours = minutes / 60;
  if (minutes < 1) return of_unit(span.count(), "s", "s");
  if (hours < 2 && minutes != 60) return of_unit(minutes, "min", "min");
  if (hours < 48) return of_unit(hours, "h", "h");
  return of_unit(hours / 24, "day", "days");
}

std::string span_words(double readings, Duration every) {
  return span_words(readings * std::chrono::duration<double>(every));
}

void Paper::heading(const std::string& text) {
  text_ += '\n';
  for (const std::string& line : flowing(text, kWidth)) text_ += line + '\n';
}

void Paper::row(const std::string& label, const std::string& text) {
  std::string front = label;
  const std::size_t margin = std::max(label.size() + 1, kLabel);
  for (const std::string& line : flowing(text, kWidth - margin)) {
    front.resize(margin, ' ');
    text_ += front + line + '\n';
    front.clear();
  }
}

}  // namespace agreed::plan
