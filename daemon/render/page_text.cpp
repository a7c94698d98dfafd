#include "daemon/render/page_text.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdio>

#include "core/base/rfc3339.hpp"

namespace agreed {
namespace {

constexpr std::string_view kMinus = "\u2212";
constexpr std::string_view kTied = "\u00a0";  // number and unit stay on one line
constexpr int kMostDecimals = 12;

bool plain(char c) {
  return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9');
}

std::string fixed(double value, int decimals) {
  std::array<char, 400> text{};
  const int length =
      std::snprintf(text.data(), text.size(), "%.*f", std::clamp(decimals, 0, kMostDecimals), value);
  return {text.data(), static_cast<std::size_t>(length)};
}

std::string true_minus(std::string number) {
  if (number.empty() || number.front() != '-') return number;
  const bool zero = number.find_first_of("123456789") == std::string::npos;
  return (zero ? std::string() : std::string(kMinus)) + number.substr(1);
}

/// "2026-02-03 06:00 UTC" at the beginning of `text`, as shown_time writes it.
bool begins_with_time(std::string_view text) {
  constexpr std::string_view pattern = "0000-00-00 00:00 UTC";
  if (text.size() < pattern.size()) return false;
  for (std::size_t i = 0; i < pattern.size(); ++i) {
    const bool fits = pattern[i] == '0' ? text[i] >= '0' && text[i] <= '9' : text[i] == pattern[i];
    if (!fits) return false;
  }
  return true;
}

}  // namespace

std::string escaped(std::string_view text) {
  std::string out;
  out.reserve(text.size() + text.size() / 8);
  for (const char c : text) {
    switch (c) {
      case '&':
        out += "&amp;";
        break;
      case '<':
        out += "&lt;";
        break;
      case '>':
        out += "&gt;";
        break;
      case '"':
        out += "&quot;";
        break;
      case '\'':
        out += "&#39;";
        break;
      default:
        out += (static_cast<unsigned char>(c) < 0x20 || c == 0x7f) ? ' ' : c;
    }
  }
  return out;
}

std::string flowing_html(std::string_view text) {
  constexpr std::size_t kTimeLength = 20;
  std::string out;
  std::size_t done = 0;
  for (std::size_t at = 0; at < text.size(); ++at) {
    if (!begins_with_time(text.substr(at))) continue;
    out += escaped(text.substr(done, at - done)) + "<span class=\"whole\">" +
           std::string(text.substr(at, kTimeLength)) + "</span>";
    done = at + kTimeLength;
    at = done - 1;
  }
  return out + escaped(text.substr(done));
}

std::string path_segment(std::string_view text) {
  constexpr std::string_view digits = "0123456789ABCDEF";
  std::string out;
  for (const char c : text) {
    if (plain(c) || c == '-' || c == '_' || c == '.' || c == '~') {
      out += c;
      continue;
    }
    const auto byte = static_cast<unsigned char>(c);
    out += '%';
    out += digits[byte >> 4];
    out += digits[byte & 15];
  }
  return out;
}

std::string id_part(std::string_view text) {
  std::string out(text);
  std::replace_if(
      out.begin(), out.end(), [](char c) { return !plain(c) && c != '-' && c != '_'; }, '-');
  return out;
}

std::string spaced(std::string_view code) {
  std::string out(code);
  std::replace(out.begin(), out.end(), '_', ' ');
  return out;
}

std::string shortened(std::string_view text, std::size_t most) {
  std::size_t characters = 0, at = 0;
  for (; at < text.size(); ++at) {
    const bool begins_one = (static_cast<unsigned char>(text[at]) & 0xC0) != 0x80;
    if (begins_one && characters++ == most) return std::string(text.substr(0, at)) + "\u2026";
  }
  return std::string(text);
}

NumberStyle number_style(const Measurand& measurand, std::optional<double> scale) {
  constexpr int kSignificant = 3;
  NumberStyle style{kSignificant, measurand.unit};
  if (measurand.decimals)
    style.decimals = *measurand.decimals + 1;
  else if (scale && std::isfinite(*scale) && *scale > 0)
    style.decimals = kSignificant - 1 - static_cast<int>(std::floor(std::log10(*scale)));
  style.decimals = std::clamp(style.decimals, 0, kMostDecimals);
  return style;
}

std::string shown(double value, int decimals) {
  if (!std::isfinite(value)) return "not known";
  return true_minus(fixed(value, decimals));
}

std::string shown_signed(double value, int decimals) {
  std::string text = shown(value, decimals);
  const bool zero = text.find_first_of("123456789") == std::string::npos;
  return std::isfinite(value) && value > 0 && !zero ? "+" + text : text;
}

std::string with_unit(double value, const NumberStyle& style) {
  const std::string number = shown(value, style.decimals);
  return style.unit.empty() ? number : number + std::string(kTied) + style.unit;
}

std::string shortest(double value) {
  if (!std::isfinite(value)) return "not known";
  std::array<char, 40> text{};
  const int length = std::snprintf(text.data(), text.size(), "%.6g", value);
  return true_minus({text.data(), static_cast<std::size_t>(length)});
}

std::string shown_share(double share) {
  if (!std::isfinite(share)) return "not known";
  const double percent = 100 * std::clamp(share, 0.0, 1.0);
  if (percent >= 99.95) return share < 1 ? "more than 99.9\u00a0%" : "100\u00a0%";
  if (percent < 0.05) return share > 0 ? "less than 0.1\u00a0%" : "0\u00a0%";
  return fixed(percent, percent > 99 || percent < 1 ? 1 : 0) + std::string(kTied) + "%";
}

std::string counted(std::int64_t count, std::string_view one, std::string_view many) {
  return std::to_string(count) + " " + std::string(count == 1 ? one : many);
}

std::string shown_time(Instant at) {
  std::string text = to_rfc3339(at).substr(0, 16);
  text[10] = ' ';
  return text + " UTC";
}

std::string time_html(Instant at) {
  return "<time datetime=\"" + to_rfc3339(at) + "\">" + shown_time(at) + "</time>";
}

std::string shown_span(Duration span) {
  using namespace std::chrono;
  if (span < minutes(1)) return "a moment";
  if (span < hours(2)) return counted(duration_cast<minutes>(span).count(), "min", "min");
  if (span < hours(48)) return counted(duration_cast<hours>(span).count(), "h", "h");
  return counted(duration_cast<days>(span).count(), "day", "days");
}

}  // namespace agreed
