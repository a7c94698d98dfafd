#include "daemon/render/open_metrics.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "core/base/ascii.hpp"
#include "core/base/number_text.hpp"

namespace agreed {
namespace {

// Whole numbers up to here are written out: 100000 and not 1e+05.
constexpr double kLargestPlain = 1e15;

struct TypeWords {
  const char* name;
  const char* suffix;
};

TypeWords words_of(MetricType type) {
  switch (type) {
    case MetricType::counter:
      return {"counter", "_total"};
    case MetricType::info:
      return {"info", "_info"};
    case MetricType::state_set:
      return {"stateset", ""};
    case MetricType::gauge:
      break;
  }
  return {"gauge", ""};
}

/// Letters, digits and '_', not beginning with a digit.
bool is_name(std::string_view text) {
  return !text.empty() && !ascii::is_digit(text.front()) && std::all_of(text.begin(), text.end(), [](char c) {
    return ascii::is_letter_or_digit(c) || c == '_';
  });
}

void require(bool right, const std::string& what) {
  if (!right) throw std::invalid_argument("OpenMetrics: " + what);
}

std::string number(double value) {
  const bool plain = std::trunc(value) == value && std::abs(value) < kLargestPlain;
  return plain ? fixed(value, 0) : exact(value);
}

}  // namespace

std::string escaped_for_metrics(std::string_view text) {
  std::string out;
  out.reserve(text.size());
  for (const char c : text) {
    if (c == '\n') {
      out += "\\n";
      continue;
    }
    if (c == '\\' || c == '"') out += '\\';
    out += c;
  }
  return out;
}

void OpenMetrics::begin(const MetricFamily& family) {
  const std::string name(family.name), unit(family.unit);
  require(is_name(family.name), "not a name: " + name);
  require(!name.ends_with("_total") && !name.ends_with("_info"),
          "the suffix is not part of the name: " + name);
  require(unit.empty() || name.ends_with("_" + unit), name + " does not end in its unit " + unit);
  require(unit.empty() || family.type == MetricType::gauge || family.type == MetricType::counter,
          name + " is of a type without a unit");
  require(std::find(begun_.begin(), begun_.end(), name) == begun_.end(), name + " was written before");
  begun_.push_back(name);
  const TypeWords words = words_of(family.type);
  name_ = name;
  suffix_ = words.suffix;
  type_ = family.type;
  text_ += "# TYPE " + name + " " + words.name + "\n";
  if (!unit.empty()) text_ += "# UNIT " + name + " " + unit + "\n";
  text_ += "# HELP " + name + " " + escaped_for_metrics(family.help) + "\n";
}

void OpenMetrics::sample(const Labels& labels, std::optional<double> value) {
  if (!value || !std::isfinite(*value)) return;
  require(type_ != MetricType::counter || *value >= 0, name_ + " counts and cannot be negative");
  text_ += name_ + suffix_;
  char before = '{';
  for (const auto& [name, text] : labels) {
    require(is_name(name), "not a label's name: " + std::string(name));
    text_.append(1, before).append(name).append("=\"").append(escaped_for_metrics(text)).append(1, '"');
    before = ',';
  }
  if (!labels.empty()) text_ += '}';
  text_ += " " + number(*value) + "\n";
}

void OpenMetrics::states(const Labels& labels, std::span<const std::string_view> states,
                         std::string_view current) {
  require(std::find(states.begin(), states.end(), current) != states.end(),
          name_ + " knows no state " + std::string(current));
  for (const std::string_view state : states) {
    Labels with_state = labels;
    with_state.emplace_back(name_, std::string(state));
    sample(with_state, state == current ? 1 : 0);
  }
}

}  // namespace agreed
