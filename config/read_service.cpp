#include <algorithm>

#include "config/parts.hpp"
#include "config/url.hpp"

namespace agreed::settings_file {

std::filesystem::path resolved(const std::filesystem::path& folder, const std::string& text) {
  const std::filesystem::path path = (folder / text).lexically_normal();
  // "drop/line1/" and "drop/line1" are the same folder.
  return path.has_filename() || !path.has_relative_path() ? path : path.parent_path();
}

std::string not_one_of(const std::string& found, const std::vector<std::string>& ids) {
  return "found '" + found + "', expected one of " + enumerated(ids) + did_you_mean(found, ids);
}

std::vector<std::string> known_ids(const Section& section, const std::string& key,
                                   const std::vector<std::string>& known) {
  std::vector<std::string> found;
  const auto words = section.words(key);
  for (std::size_t i = 0; i < words.size(); ++i) {
    if (words[i].empty()) continue;
    if (std::find(known.begin(), known.end(), words[i]) == known.end()) {
      section.error(key, i, not_one_of(words[i], known));
    } else if (std::find(found.begin(), found.end(), words[i]) == found.end()) {
      found.push_back(words[i]);
    }
  }
  return found;
}

void read_service(const Section& top, const std::filesystem::path& folder, Draft& draft) {
  Config& config = draft.config;
  draft.settings.site = top.text("site").value_or("");
  config.state = resolved(folder, top.text("state").value_or("state"));
  config.page_url = top.text("page_url");

  const Section listen = top.section("listen");
  config.least_free_mb = top.number("least_free_mb");
  config.listen.address = listen.text("address").value_or(config.listen.address);
  config.listen.port = listen.whole_number("port").value_or(config.listen.port);
  config.listen.open_to_network = listen.flag("open_to_network");
  config.listen.behind_proxy = listen.flag("behind_proxy");
  if (const auto tokens = top.section("access").text("tokens_file"))
    config.tokens_file = resolved(folder, *tokens);
  const bool guarded = config.tokens_file || config.listen.open_to_network;
  if (!is_loopback(config.listen.address) && !guarded)
    listen.error("address",
                 "found '" + config.listen.address +
                     "', which others can reach; expected access.tokens_file, or open_to_network: true "
                     "to let everyone read");
  if (config.listen.behind_proxy && !guarded)
    listen.error("behind_proxy",
                 "found true, so others can reach the service through the proxy; expected "
                 "access.tokens_file, or open_to_network: true to let everyone read");
  for (const IntakeSettings& intake : config.intake)
    if (intake.inbox == config.state)
      top.error("state", "found the inbox of analyzer " + intake.analyzer + ", expected a folder of its own");
}

}  // namespace agreed::settings_file
