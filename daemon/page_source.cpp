#include "daemon/page_source.hpp"

#include <map>

#include "daemon/clock.hpp"
#include "daemon/http/intake_parameters.hpp"
#include "daemon/http/parameters.hpp"
#include "daemon/http/target.hpp"
#include "daemon/log.hpp"
#include "daemon/render/alert_record_json.hpp"
#include "daemon/render/page.hpp"

namespace agreed {
namespace {

constexpr int kAlertsAPage = 25, kFilesAPage = 50;
constexpr const char* kCurrent = "open,acknowledged";

std::string given(const Target& target, std::string_view name) {
  const std::string* text = target.parameter(name);
  return text ? *text : std::string();
}

/// Cuts what was asked for with one more than `most` to `most`, and says where the next page begins.
template <class Rows, class CursorOf>
std::string cut(Rows& rows, int most, const CursorOf& cursor_of) {
  if (rows.size() <= static_cast<std::size_t>(most)) return {};
  rows.resize(static_cast<std::size_t>(most));
  return cursor_of(rows.back());
}

std::vector<Alert> copies_of(const std::vector<SharedAlert>& alerts) {
  std::vector<Alert> copies;
  copies.reserve(alerts.size());
  for (const SharedAlert& alert : alerts) copies.push_back(*alert);
  return copies;
}

/// One request for a page, and what it is answered from.
class PageMaker {
 public:
  PageMaker(const Snapshot& snapshot, const AlertSource& alerts, const IntakeSource& intake,
            const PageAsk& ask)
      : alerts_(alerts),
        intake_(intake),
        path_(ask.path),
        target_(take_apart("/?" + ask.query).value_or(Target{})),
        current_(copies_of(snapshot.alerts)),
        input_{.snapshot = snapshot,
               .current = current_,
               .now = now_utc(),
               .visitor = ask.visitor,
               .here = ask.path + (ask.query.empty() ? "" : "?" + ask.query),
               .notice = ask.notice} {}

  std::optional<PageAnswer> make() {
    if (path_ == "/sign-in") {
      input_.current = {};  // whoever has not signed in is not told how many alerts there are
      return render_sign_in(input_, local(given(target_, "to")));
    }
    if (path_ == "/not-taken") return render_words(input_, "Not done", 403);
    if (path_ == "/nothing-here") return render_words(input_, "There is nothing at this path", 404);
    try {
      if (path_ == "/alerts") return alerts();
      if (path_.starts_with("/alerts/")) return alert();
      if (path_ == "/files") return files();
    } catch (const std::exception& error) {
      log_warning("the page {} cannot be made: {}", path_, error.what());
      input_.notice =
          "The journal cannot be read at present; the service's log says why. Load the page again.";
      return render_words(input_, "Not readable at present", 503);
    }
    return render_page(path_, {target_.parameters.begin(), target_.parameters.end()}, input_);
  }

 private:
  static std::string local(const std::string& to) { return to.starts_with('/') && take_apart(to) ? to : "/"; }

  PageAnswer alerts() {
    auto asked = alert_query(target_);
    if (!asked.error.empty()) {
      input_.notice = asked.error;
      return render_words(input_, "No such list of alerts", 400);
    }
    AlertList list;
    list.state = target_.parameter("state") ? given(target_, "state") : kCurrent;
    list.after = given(target_, "after");
    if (asked.value.states.empty()) asked.value.states = {"open", "acknowledged"};
    asked.value.limit = kAlertsAPage + 1;
    list.records = alerts_.alerts(asked.value);
    list.next = cut(list.records, kAlertsAPage,
                    [](const AlertRecord& record) { return std::to_string(alert_record_id(record)); });
    return render_alerts(input_, list);
  }

  std::optional<PageAnswer> alert() {
    const auto id = whole_number(std::string_view(path_).substr(std::string_view("/alerts/").size()));
    const auto record = id ? alerts_.alert(*id) : std::nullopt;
    if (!record) return std::nullopt;
    return render_alert(input_, *record);
  }

  PageAnswer files() {
    auto asked = file_query(target_);
    if (!asked.error.empty()) {
      input_.notice = asked.error;
      return render_words(input_, "No such list of files", 400);
    }
    asked.value.limit = kFilesAPage + 1;
    FileList list{
        intake_.files(asked.value), asked.value.outcome, asked.value.analyzer, given(target_, "after"), {}};
    list.next = cut(list.files, kFilesAPage, [](const FileRow& file) { return std::to_string(file.id); });
    return render_files(input_, list);
  }

  const AlertSource& alerts_;
  const IntakeSource& intake_;
  const std::string path_;
  const Target target_;
  const std::vector<Alert> current_;
  PageInput input_;
};

}  // namespace

PageHook pages_of(const Service& service, AlertSource alerts, IntakeSource intake) {
  return [&service, alerts = std::move(alerts),
          intake = std::move(intake)](const PageAsk& ask) -> std::optional<Page> {
    const auto snapshot = service.snapshot();
    auto made = PageMaker(*snapshot, alerts, intake, ask).make();
    if (!made) return std::nullopt;
    Page page{made->status, std::move(made->content_type), std::move(made->body), {}, {}};
    if (made->fingerprint.empty()) return page;
    // Weak: two pages with one tag may differ in the time of their figures, which Last-Modified tells.
    page.etag = "W/\"" + made->fingerprint + "\"";
    if (snapshot->at != Instant{}) page.renewed_at = snapshot->at;
    return page;
  };
}

}  // namespace agreed
