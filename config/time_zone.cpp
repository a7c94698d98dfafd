#include "config/time_zone.hpp"

#include <algorithm>
#include <filesystem>
#include <fstream>

namespace agreed::settings_file {
namespace {
namespace fs = std::filesystem;

constexpr const char* kDatabase = "/usr/share/zoneinfo";

/// The database's folder also holds tables; only a zone's file begins with these letters (RFC 8536).
bool is_zone_file(const fs::path& file) {
  std::ifstream stream(file, std::ios::binary);
  std::string magic(4, ' ');
  stream.read(magic.data(), 4);
  return stream.gcount() == 4 && magic == "TZif";
}

bool could_be_a_name(std::string_view name) {
  constexpr std::string_view kOthers = "_+-/";
  const auto allowed = [&](char c) {
    return (c >= 'A' && c <= 'Z') || (c >= 'a' && c <= 'z') || (c >= '0' && c <= '9') ||
           kOthers.find(c) != std::string_view::npos;
  };
  return !name.empty() && name.size() <= 64 && name.front() != '/' &&
         std::all_of(name.begin(), name.end(), allowed);
}

}  // namespace

bool is_zone(std::string_view name) {
  if (name == "UTC") return true;
  std::error_code error;
  const fs::path file = fs::path(kDatabase) / name;
  return could_be_a_name(name) && fs::is_regular_file(file, error) && is_zone_file(file);
}

const std::vector<std::string>& zone_names() {
  static const std::vector<std::string> names = [] {
    std::vector<std::string> found;
    std::error_code error;
    for (fs::recursive_directory_iterator at(kDatabase, error), end; !error && at != end;
         at.increment(error)) {
      const std::string name = at->path().lexically_relative(kDatabase).string();
      // The same zones over again, without and with leap seconds.
      const bool copy = name == "posix" || name == "right";
      if (copy) at.disable_recursion_pending();
      if (!copy && is_zone(name)) found.push_back(name);
    }
    std::sort(found.begin(), found.end());
    return found;
  }();
  return names;
}

}  // namespace agreed::settings_file
