#include "daemon/render/page_text.hpp"

#include <algorithm>
#include <cmath>

#include "core/base/ascii.hpp"

namespace agreed {
namespace {

constexpr std::string_view kMinus = "\u2212";
constexpr std::string_view kTied = "\u00a0";  // number and unit stay on one line
constexpr int kMostDecimals = 12;

std::string true_minus(const std::string& number) {
  return number.starts_with('-') ? std::string(kMinus) + number.substr(1) : number;
}

/// "2026-02-03 06:00 UTC" at the beginning of `text`, as time_words writes it.
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
    if (ascii::is_letter_or_digit(c) || c == '-' || c == '_' || c == '.' || c == '~') {
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
      out.begin(), out.end(), [](char c) { return !ascii::is_letter_or_digit(c) && c != '-' && c != '_'; },
      '-');
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

PageNumberStyle number_style(const Measurand& measurand, std::optional<double> scale) {
  constexpr int kSignificant = 3;
  PageNumberStyle style{kSignificant, measurand.unit};
  if (measurand.decimals)
    style.decimals = *measurand.decimals + 1;
  else if (scale && std::isfinite(*scale) && *scale > 0)
    style.decimals = kSignificant - 1 - static_cast<int>(std::floor(std::log10(*scale)));
  style.decimals = std::clamp(style.decimals, 0, kMostDecimals);
  return style;
}

std::string shown(double value, int decimals) {
  if (!std::isfinite(value)) return "not known";
  return true_minus(fixed(value, std::clamp(decimals, 0, kMostDecimals)));
}

std::string shown_signed(double value, int decimals) {
  std::string text = shown(value, decimals);
  const bool zero = text.find_first_of("123456789") == std::string::npos;
  return std::isfinite(value) && value > 0 && !zero ? "+" + text : text;
}

std::string with_unit(double value, const PageNumberStyle& style) {
  const std::string number = shown(value, style.decimals);
  return style.unit.empty() ? number : number + std::string(kTied) + style.unit;
}

std::string shortest(double value) {
  if (!std::isfinite(value)) return "not known";
  return true_minus(significant(value, 6));
}

std::string shown_share(double share) {
  if (!std::isfinite(share)) return "not known";
  const double percent = 100 * std::clamp(share, 0.0, 1.0);
  if (percent >= 99.95) return share < 1 ? "more than 99.9\u00a0%" : "100\u00a0%";
  if (percent < 0.05) return share > 0 ? "less than 0.1\u00a0%" : "0\u00a0%";
  return fixed(percent, percent > 99 || percent < 1 ? 1 : 0) + std::string(kTied) + "%";
}

std::string time_html(Instant at) {
  return "<time datetime=\"" + to_rfc3339(at) + "\">" + time_words(at) + "</time>";
}

std::string shown_span(Duration span) {
  using namespace std::chrono;
  if (span < minutes(1)) return "a moment";
  if (span < hours(2)) return counted(duration_cast<minutes>(span).count(), "min", "min");
  if (span < hours(48)) return counted(duration_cast<hours>(span).count(), "h", "h");
  return counted(duration_cast<days>(span).count(), "day", "days");
}

}  // namespace agreed
