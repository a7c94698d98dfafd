// The document around the contents: head, way through the pages, foot with its cautions.
#include "core/base/rfc3339.hpp"
#include "daemon/render/page_views.hpp"
#include "daemon/sha256.hpp"

namespace agreed {
namespace {

constexpr Duration kRenewedWithin = std::chrono::minutes(2);

std::string site_of(const PageInput& input) {
  return input.snapshot.settings ? input.snapshot.settings->site : std::string();
}

/// A link of the way through the pages; the one that leads to the page shown says so.
std::string way(const PageInput& input, const std::string& path, const std::string& words) {
  const bool here = input.here.substr(0, input.here.find('?')) == path;
  return "<li><a href=\"" + path + "\"" + (here ? " aria-current=\"page\"" : "") + ">" + escaped(words) +
         "</a></li>";
}

std::string nav_html(const PageInput& input) {
  const std::size_t open = input.current.size();
  return "<nav aria-label=\"Pages\"><ul>" + way(input, "/", "Overview") +
         way(input, "/#comparisons", "Comparisons") + way(input, "/#analyzers", "Analyzers") +
         way(input, "/alerts", open == 0 ? std::string("Alerts") : "Alerts (" + std::to_string(open) + ")") +
         way(input, "/files", "Files") + "</ul></nav>";
}

/// Who is signed in, and the way out; or the way in.
std::string account_html(const PageInput& input) {
  const PageVisitor& visitor = input.visitor;
  if (!visitor.signed_in && input.here.starts_with("/sign-in")) return {};
  if (!visitor.signed_in) return "<p class=\"account\">" + sign_in_link_html(input, "Sign in") + "</p>";
  return "<form class=\"account\" method=\"post\" action=\"/sign-out\">" + form_key_html(visitor) +
         "<span>Signed in as " + escaped(visitor.name) + (visitor.may_act ? "" : " (may read)") +
         "</span> <button type=\"submit\">Sign out</button></form>";
}

/// Says so when the service itself has stopped renewing its figures.
std::string stale_html(const PageInput& input) {
  const Snapshot& snapshot = input.snapshot;
  if (snapshot.at == Instant{} || input.now - snapshot.at <= kRenewedWithin) return {};
  return "<p class=\"stale\">Not current: the service has not renewed these figures for " +
         escaped(shown_span(input.now - snapshot.at)) + ". They are as of " + time_html(snapshot.at) +
         ".</p>";
}

std::string notice_html(const PageInput& input) {
  return input.notice.empty() ? std::string()
                              : "<p class=\"notice\" role=\"status\">" + escaped(input.notice) + "</p>";
}

std::string foot_html(const PageInput& input, const std::string& as_of) {
  const Snapshot& snapshot = input.snapshot;
  std::string out = "<footer><p>" + std::string(kCautions) + "</p>";
  out += "<p>As of <span id=\"as-of\">" + as_of + "</span>. agreed " + escaped(input.version);
  if (!snapshot.config_sha256.empty())
    out += ", configuration <code>" + escaped(snapshot.config_sha256.substr(0, 12)) + "</code>";
  return out +
         ". Times are in UTC. The same figures for programs: " + link_html("/api/status", "/api/status") +
         ".</p></footer>";
}

std::string head_html(const PageInput& input, std::string_view title) {
  const std::string site = site_of(input);
  const std::string whole_title = std::string(title) + (site.empty() ? "" : ", " + site);
  return "<!DOCTYPE html>\n<html lang=\"en\"><head><meta charset=\"utf-8\">"
         "<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">"
         "<meta name=\"color-scheme\" content=\"light dark\"><title>" +
         escaped(whole_title) +
         "</title><link rel=\"icon\" type=\"image/svg+xml\" href=\"/page.svg\">"
         "<link rel=\"stylesheet\" href=\"/page.css\">"
         "<script src=\"/page.js\" defer></script></head><body>"
         "<a class=\"skip\" href=\"#main\">Skip to the contents</a><header class=\"top\"><p class=\"site\">" +
         escaped(site.empty() ? std::string("agreed") : site) + "</p>" + nav_html(input) +
         account_html(input) + "</header>";
}

}  // namespace

PageAnswer document(const PageInput& input, std::string_view title, const std::string& main,
                    const PageLife& life) {
  const std::string head = head_html(input, title);
  const std::string inside = notice_html(input) + stale_html(input) + main;
  const Instant at = input.snapshot.at;
  PageAnswer answer{life.status, "text/html; charset=utf-8", {}, {}};
  answer.fingerprint = sha256_hex(head + inside + foot_html(input, {})).substr(0, 32);
  answer.body = head + "<p id=\"stale\" class=\"stale\" role=\"status\" hidden></p>";
  answer.body += "<p id=\"live\" class=\"unseen\" aria-live=\"polite\"></p>";
  answer.body += "<main id=\"main\" tabindex=\"-1\" data-at=\"" + to_rfc3339(at) + "\"";
  if (life.renewed) answer.body += " data-tag=\"" + answer.fingerprint + "\"";
  answer.body += ">" + inside + "</main>";
  answer.body +=
      foot_html(input, at == Instant{} ? std::string("the start") : time_html(at)) + "</body></html>\n";
  return answer;
}

std::string form_key_html(const PageVisitor& visitor) {
  return R"(<input type="hidden" name="form_key" value=")" + escaped(visitor.form_key) + "\">";
}

std::string sign_in_link_html(const PageInput& input, std::string_view words) {
  return link_html("/sign-in?to=" + path_segment(input.here), words);
}

}  // namespace agreed
