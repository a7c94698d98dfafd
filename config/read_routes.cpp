// Webhook routes. A secret is looked at only to see that it is there; it is neither kept nor shown.
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <set>
#include <sstream>
#include <string_view>
#include <utility>

#include "config/parts.hpp"
#include "config/unreadable.hpp"
#include "config/url.hpp"

namespace agreed::settings_file {
namespace {
namespace fs = std::filesystem;

constexpr int kMostSecrets = 2;  // new and old
constexpr std::size_t kLargestSecretFile = 4'096;
constexpr std::size_t kMostRead = 65'536;  // certificates may have long words before them

/// Words between white space.
int words_in(const std::string& text) {
  std::istringstream stream(text);
  std::string word;
  int count = 0;
  while (stream >> word) ++count;
  return count;
}

int lines_in(const std::string& text) {
  std::istringstream stream(text);
  std::string line;
  int count = 0;
  while (std::getline(stream, line))
    if (line.find_first_not_of(" \t\r") != std::string::npos) ++count;
  return count;
}

/// The beginning of a file, or why it cannot be had.
struct FileText {
  std::string text;
  std::string trouble;
};
FileText text_of(const fs::path& file) {
  if (std::string trouble = why_unreadable(file); !trouble.empty()) return {"", std::move(trouble)};
  std::ifstream stream(file, std::ios::binary);
  std::string text(kMostRead, '\0');
  stream.read(text.data(), static_cast<std::streamsize>(text.size()));
  if (!stream.is_open() || stream.bad()) return {"", file.string() + " cannot be read"};
  text.resize(static_cast<std::size_t>(stream.gcount()));
  return {text, ""};
}

void check_secret_file(const Section& route, const fs::path& file) {
  const FileText content = text_of(file);
  if (!content.trouble.empty())
    return route.error("secret_file",
                       content.trouble + "; expected a file with one secret, or two lines: new, old");
  const int secrets = lines_in(content.text);
  if (secrets < 1 || secrets > kMostSecrets || content.text.size() > kLargestSecretFile)
    return route.error("secret_file", "found " + std::to_string(secrets) + " lines in " + file.string() +
                                          ", expected one secret, or two lines: new, old");
  std::error_code error;
  const fs::perms rights = fs::status(file, error).permissions();
  if (!error && (rights & fs::perms::others_read) != fs::perms::none)
    route.warning("secret_file",
                  "everybody on this machine can read " + file.string() + "; expected mode 0600 or 0640");
}

void check_secret_env(const Section& route, const std::string& variable) {
  const char* value = std::getenv(variable.c_str());  // NOLINT(concurrency-mt-unsafe): nobody here sets any
  const int secrets = value == nullptr ? 0 : words_in(value);
  if (secrets < 1 || secrets > kMostSecrets)
    route.error(
        "secret_env",
        value == nullptr
            ? "the environment variable it names is not set; expected the secret in it"
            : "found " + std::to_string(secrets) +
                  " words in the environment variable it names, expected one secret, or two: new, old");
}

void check_secret(const Section& section, const Route& route) {
  const int given = (section.given("secret_file") ? 1 : 0) + (section.given("secret_env") ? 1 : 0) +
                    (route.unsigned_ ? 1 : 0);
  if (given == 0 && !(section.given("unsigned") && !section.usable("unsigned")))
    section.error_here(
        "found no signing secret, expected secret_file or secret_env, or unsigned: true to send without");
  if (given > 1)
    section.error_here("found several of secret_file, secret_env and unsigned: true, expected one of them");
  if (route.secret_file) check_secret_file(section, *route.secret_file);
  if (route.secret_env) check_secret_env(section, *route.secret_env);
}

void check_url(const Section& section, const Route& route) {
  const auto parts = url_parts(route.url);
  if (!parts) return;
  if (!parts->encrypted && !is_loopback(parts->host))
    section.warning("url", "found http:// to another machine (" + parts->origin +
                               "), expected https://: alerts travel in the clear");
  if (!route.ca_file) return;
  const FileText certificate = text_of(*route.ca_file);
  if (!certificate.trouble.empty())
    section.error("ca_file", certificate.trouble + "; expected certificates in PEM");
  else if (certificate.text.find("-----BEGIN") == std::string::npos)
    section.error("ca_file",
                  "found no -----BEGIN in " + route.ca_file->string() + ", expected certificates in PEM");
}

std::vector<AlertKind> kinds_of(const Section& section) {
  std::vector<AlertKind> kinds;
  for (const std::string& word : section.words("kinds"))
    if (const auto kind = alert_kind_from(word)) kinds.push_back(*kind);
  return kinds;
}

/// An empty list would mean "none" to the reader and "all" to the service.
void refuse_empty_filters(const Section& section) {
  for (const char* filter : {"kinds", "analyzers", "measurands", "comparisons"})
    if (section.is_empty_list(filter))
      section.error(filter, "found an empty list, expected at least one; leave the key out for all");
}

Route route_of(const Section& section, const fs::path& folder, const Settings& settings) {
  Route route;
  route.name = section.text("name").value_or("");
  route.url = section.text("url").value_or("");
  if (const auto file = section.text("secret_file")) route.secret_file = resolved(folder, *file);
  route.secret_env = section.text("secret_env");
  route.unsigned_ = section.flag("unsigned");
  if (const auto file = section.text("ca_file")) route.ca_file = resolved(folder, *file);
  route.kinds = kinds_of(section);
  route.at_least = severity_from(section.text("at_least").value_or("notice")).value_or(Severity::notice);
  route.analyzers = known_ids(section, "analyzers", ids_of(settings.analyzers));
  route.measurands = known_ids(section, "measurands", ids_of(settings.measurands));
  route.comparisons = known_ids(section, "comparisons", ids_of(settings.comparisons));
  route.heartbeat = section.duration("heartbeat");
  route.unacknowledged_for = section.duration("unacknowledged_for");
  return route;
}

}  // namespace

void read_routes(const Section& top, const fs::path& folder, Draft& draft) {
  const Section alerts = top.section("alerts");
  std::set<std::string> names;
  for (const Section& section : alerts.list("routes")) {
    Route route = route_of(section, folder, draft.settings);
    refuse_empty_filters(section);
    check_secret(section, route);
    check_url(section, route);
    if (!route.name.empty() && !names.insert(route.name).second)
      section.error("name", "found '" + route.name + "' twice, expected routes of different names");
    draft.config.routes.push_back(std::move(route));
  }
}

}  // namespace agreed::settings_file
