#include "daemon/log.hpp"

#include <cstdlib>
#include <memory>

#include <spdlog/sinks/stdout_sinks.h>
#include <spdlog/spdlog.h>
#include <sys/stat.h>
#include <unistd.h>

#include "daemon/printable.hpp"

namespace agreed {
namespace {

/// systemd reads "<priority>" at the start of a line and stamps it itself (sd-daemon(3)), but only of the
/// stream whose device and inode it names: the error output may have been led elsewhere (systemd.exec(5)).
bool under_systemd() {
  const char* named = std::getenv("JOURNAL_STREAM");  // NOLINT(concurrency-mt-unsafe): nobody here sets any
  struct stat stream {};
  if (named == nullptr || ::fstat(STDERR_FILENO, &stream) != 0) return false;
  return named == fmt::format("{}:{}", stream.st_dev, stream.st_ino);
}

std::shared_ptr<spdlog::logger> make_logger() {
  auto logger = std::make_shared<spdlog::logger>("agreed", std::make_shared<spdlog::sinks::stderr_sink_mt>());
  logger->set_pattern(under_systemd() ? "%v" : "%Y-%m-%dT%H:%M:%S.%eZ %l %v", spdlog::pattern_time_type::utc);
  logger->flush_on(spdlog::level::info);
  return logger;
}

spdlog::logger& logger() {
  static const std::shared_ptr<spdlog::logger> kLogger = make_logger();
  return *kLogger;
}

}  // namespace

void write_log(LogLevel level, std::string_view line) {
  const std::string text = is_clean_text(line) ? std::string(line) : printable(line);
  static const bool kSystemd = under_systemd();
  switch (level) {
    case LogLevel::info:
      return logger().info("{}{}", kSystemd ? "<6>" : "", text);
    case LogLevel::warning:
      return logger().warn("{}{}", kSystemd ? "<4>" : "", text);
    case LogLevel::error:
      return logger().error("{}{}", kSystemd ? "<3>" : "", text);
  }
}

void close_log() {
  spdlog::shutdown();
}

}  // namespace agreed
