#pragma once
// The log: one line an event, to standard error or, under systemd, with a priority for the journal. Text from
// outside is made printable before it gets here.
#include <string>
#include <string_view>

#include <fmt/core.h>

namespace agreed {

/// Who must act: info = nobody, warning = someone soon, error = someone now.
enum class LogLevel { info, warning, error };

void write_log(LogLevel level, std::string_view line);
/// Flushes and ends logging; nothing is written afterwards.
void close_log();

template <class... Args>
void log_info(fmt::format_string<Args...> format, Args&&... args) {
  write_log(LogLevel::info, fmt::format(format, std::forward<Args>(args)...));
}
template <class... Args>
void log_warning(fmt::format_string<Args...> format, Args&&... args) {
  write_log(LogLevel::warning, fmt::format(format, std::forward<Args>(args)...));
}
template <class... Args>
void log_error(fmt::format_string<Args...> format, Args&&... args) {
  write_log(LogLevel::error, fmt::format(format, std::forward<Args>(args)...));
}

}  // namespace agreed
