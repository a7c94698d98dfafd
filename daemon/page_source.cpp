#include "daemon/page_source.hpp"

#include <map>

#include "daemon/clock.hpp"
#include "daemon/http/target.hpp"
#include "daemon/log.hpp"
#include "daemon/render/alert_json.hpp"
#include "daemon/render/page.hpp"

namespace agreed {
namespace {

constexpr int kResolvedShown = 20;

std::vector<Alert> recently_resolved(const AlertSource& source) {
  std::vector<Alert> resolved;
  try {
    for (const AlertRecord& record :
         source.alerts({.states = {"resolved"}, .since = {}, .limit = kResolvedShown}))
      resolved.push_back(alert_from_json(record.body));
  } catch (const std::exception& error) {
    // The page without its past is better than no page.
    log_warning("resolved alerts cannot be shown: {}", error.what());
  }
  return resolved;
}

}  // namespace

PageHook pages_of(const Service& service, AlertSource alerts) {
  return [&service, alerts = std::move(alerts)](const std::string& path,
                                                const std::string& query) -> std::optional<Page> {
    const auto snapshot = service.snapshot();
    const auto target = take_apart("/?" + query);
    const std::map<std::string, std::string> parameters =
        target ? std::map<std::string, std::string>(target->parameters.begin(), target->parameters.end())
               : std::map<std::string, std::string>();
    std::vector<Alert> current;
    for (const SharedAlert& alert : snapshot->alerts) current.push_back(*alert);
    auto page = render_page(path, parameters, *snapshot, current, recently_resolved(alerts), now_utc());
    if (!page) return std::nullopt;
    return Page{page->status, std::move(page->content_type), std::move(page->body)};
  };
}

}  // namespace agreed
