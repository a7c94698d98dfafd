#include "daemon/intake/intake_log.hpp"

#include <spdlog/spdlog.h>

namespace agreed {

void log_intake_info(std::string_view analyzer, const std::string& words) {
  spdlog::info("{}: {}", analyzer, words);
}

void log_intake_warning(std::string_view analyzer, const std::string& words) {
  spdlog::warn("{}: {}", analyzer, words);
}

}  // namespace agreed
