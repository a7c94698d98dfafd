#pragma once
// How the lines of describe() look. Private to config/describe*.
#include <map>
#include <string>
#include <vector>

namespace agreed {

/// "  name                    value\n"
inline std::string line(const std::string& name, const std::string& value) {
  constexpr std::size_t kWidth = 24;
  return "  " + name + std::string(name.size() < kWidth ? kWidth - name.size() : 1, ' ') + value + '\n';
}

inline std::string list_of(const std::vector<std::string>& words) {
  std::string text;
  for (const std::string& word : words) text += (text.empty() ? "" : ", ") + word;
  return text;
}

/// "operator = user, replicate = cup"
inline std::string pairs_of(const std::map<std::string, std::string>& texts) {
  std::vector<std::string> words;
  words.reserve(texts.size());
  for (const auto& [name, text] : texts) words.push_back(name + " = " + text);
  return list_of(words);
}

/// " (LOW = wheat-low, HIGH = wheat-high)"; empty when nothing is translated.
inline std::string translated(const std::map<std::string, std::string>& words) {
  return words.empty() ? "" : " (" + pairs_of(words) + ")";
}

}  // namespace agreed
