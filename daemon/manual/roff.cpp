#include "daemon/manual/roff.hpp"

#include <cctype>

namespace agreed::manual {
namespace {

constexpr std::size_t kLineLength = 78;

std::string escaped(std::string_view text) {
  std::string made;
  for (const char sign : text) {
    switch (sign) {
      case '\\':
        made += "\\e";
        break;
      case '-':
        made += "\\-";
        break;
      case '\'':
        made += "\\(aq";
        break;
      case '`':
        made += "\\(ga";
        break;
      case '^':
        made += "\\(ha";
        break;
      case '~':
        made += "\\(ti";
        break;
      default:
        made += sign;
    }
  }
  return made;
}

/// A point at the beginning of a line would be a request.
void add_line(std::string& page, const std::string& line) {
  if (line.starts_with('.')) page += "\\&";
  page += line + '\n';
}

}  // namespace

std::string prose(std::string_view text) {
  std::string made, line, word;
  const auto end_word = [&] {
    if (word.empty()) return;
    if (!line.empty() && line.size() + 1 + word.size() > kLineLength) {
      add_line(made, line);
      line.clear();
    }
    line += (line.empty() ? "" : " ") + word;
    word.clear();
  };
  for (const char sign : text) {
    if (sign == ' ' || sign == '\n')
      end_word();
    else
      word += escaped({&sign, 1});
  }
  end_word();
  if (!line.empty()) add_line(made, line);
  return made;
}

std::string bold(std::string_view text) {
  return "\\fB" + escaped(text) + "\\fP";
}

std::string typed(std::string_view lines) {
  std::string made = ".PP\n.RS 4\n.EX\n";
  while (!lines.empty()) {
    const std::size_t end = lines.find('\n');
    add_line(made, escaped(lines.substr(0, end)));
    lines = end == std::string_view::npos ? std::string_view{} : lines.substr(end + 1);
  }
  return made + ".EE\n.RE\n";
}

std::string title(std::string_view name, int section, std::string_view date, std::string_view source) {
  std::string upper;
  for (const char sign : name) upper += static_cast<char>(std::toupper(static_cast<unsigned char>(sign)));
  return ".TH " + upper + ' ' + std::to_string(section) + " \"" + std::string(date) + "\" \"" +
         std::string(source) + "\"\n";
}

std::string section(std::string_view name) {
  return ".SH " + std::string(name) + '\n';
}

}  // namespace agreed::manual
