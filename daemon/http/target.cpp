#include "daemon/http/target.hpp"

#include <algorithm>

namespace agreed {
namespace {

constexpr std::size_t kLongestSegment = 64;

int hex_digit(char c) {
  if (c >= '0' && c <= '9') return c - '0';
  if (c >= 'a' && c <= 'f') return c - 'a' + 10;
  if (c >= 'A' && c <= 'F') return c - 'A' + 10;
  return -1;
}

bool names_something(const std::string& segment) {
  if (segment.empty() || segment.size() > kLongestSegment || segment == "." || segment == "..") return false;
  return std::none_of(segment.begin(), segment.end(), [](char c) {
    const auto byte = static_cast<unsigned char>(c);
    return c == '/' || c == '\\' || byte < 0x20 || byte == 0x7f;
  });
}

std::optional<std::vector<std::string>> segments_of(std::string_view path) {
  std::vector<std::string> segments;
  if (path.empty() || path.front() != '/') return std::nullopt;
  path.remove_prefix(1);
  if (path.empty()) return segments;
  while (true) {
    const auto slash = path.find('/');
    const auto segment = percent_decoded(path.substr(0, slash), false);
    if (!segment || !names_something(*segment)) return std::nullopt;
    segments.push_back(*segment);
    if (slash == std::string_view::npos) return segments;
    path.remove_prefix(slash + 1);
  }
}

std::vector<std::pair<std::string, std::string>> parameters_of(std::string_view query) {
  std::vector<std::pair<std::string, std::string>> parameters;
  while (!query.empty()) {
    const auto end = std::min(query.find('&'), query.size());
    const std::string_view part = query.substr(0, end);
    query.remove_prefix(std::min(end + 1, query.size()));
    if (part.empty()) continue;
    const auto equals = std::min(part.find('='), part.size());
    const std::string_view value = part.substr(std::min(equals + 1, part.size()));
    // A malformed escape stays as it was sent, so that whoever reads the parameter finds it wrong.
    parameters.emplace_back(
        percent_decoded(part.substr(0, equals), true).value_or(std::string(part.substr(0, equals))),
        percent_decoded(value, true).value_or(std::string(value)));
  }
  return parameters;
}

}  // namespace

std::optional<std::string> percent_decoded(std::string_view text, bool plus_is_space) {
  std::string decoded;
  decoded.reserve(text.size());
  for (std::size_t i = 0; i < text.size(); ++i) {
    if (text[i] == '+' && plus_is_space) {
      decoded.push_back(' ');
    } else if (text[i] == '%') {
      if (i + 2 >= text.size()) return std::nullopt;
      const int high = hex_digit(text[i + 1]), low = hex_digit(text[i + 2]);
      if (high < 0 || low < 0) return std::nullopt;
      decoded.push_back(static_cast<char>(high * 16 + low));
      i += 2;
    } else {
      decoded.push_back(text[i]);
    }
  }
  return decoded;
}

const std::string* Target::parameter(std::string_view name) const {
  const auto found =
      std::find_if(parameters.begin(), parameters.end(), [&](const auto& p) { return p.first == name; });
  return found == parameters.end() ? nullptr : &found->second;
}

std::optional<Target> take_apart(std::string_view target) {
  const auto question = target.find('?');
  Target parts;
  parts.path = target.substr(0, question);
  if (question != std::string_view::npos) parts.query = target.substr(question + 1);
  auto segments = segments_of(parts.path);
  if (!segments) return std::nullopt;
  parts.segments = std::move(*segments);
  parts.parameters = parameters_of(parts.query);
  return parts;
}

}  // namespace agreed
