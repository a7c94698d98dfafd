// The document around the contents: head, way through the pages, foot with its cautions.
#include "core/base/rfc3339.hpp"
#include "daemon/render/page_views.hpp"

namespace agreed {
namespace {

constexpr Duration kRenewedWithin = std::chrono::minutes(2);

std::string nav_html(const PageInput& input) {
  const std::size_t open = input.current.size();
  return "<nav aria-label=\"Pages\"><ul><li>" + link_html("/", "Overview") + "</li><li>" +
         link_html("/#comparisons", "Comparisons") + "</li><li>" + link_html("/#analyzers", "Analyzers") +
         "</li><li>" +
         link_html("/alerts", open == 0 ? std::string("Alerts") : "Alerts (" + std::to_string(open) + ")") +
         "</li></ul></nav>";
}

/// Says so when the service itself has stopped renewing its figures.
std::string stale_html(const PageInput& input) {
  const Snapshot& snapshot = input.snapshot;
  if (snapshot.at == Instant{} || input.now - snapshot.at <= kRenewedWithin) return {};
  return "<p class=\"stale\">Not current: the service has not renewed these figures for " +
         escaped(shown_span(input.now - snapshot.at)) + ". They are as of " + time_html(snapshot.at) +
         ".</p>";
}

std::string foot_html(const PageInput& input) {
  const Snapshot& snapshot = input.snapshot;
  std::string out =
      "<footer><p>Results are statistical evidence and not a release decision. Where a wrong result can hurt "
      "someone "
      "(clinical, drinking water, process safety, dosing), the local regulation, the accredited procedure "
      "and the "
      "licensed or responsible person decide; agreed is not a medical device and no safety interlock.</p>";
  out += "<p>As of " + (snapshot.at == Instant{} ? std::string("the start") : time_html(snapshot.at)) +
         ". agreed " + escaped(input.version);
  if (!snapshot.config_sha256.empty())
    out += ", configuration <code>" + escaped(snapshot.config_sha256.substr(0, 12)) + "</code>";
  return out +
         ". Times are in UTC. The same figures for programs: " + link_html("/api/status", "/api/status") +
         ".</p></footer>";
}

std::string site_of(const PageInput& input) {
  return input.snapshot.settings ? input.snapshot.settings->site : std::string();
}

}  // namespace

std::string document_html(const PageInput& input, std::string_view title, const std::string& main) {
  const std::string site = site_of(input);
  const std::string whole_title = std::string(title) + (site.empty() ? "" : ", " + site);
  std::string out =
      "<!DOCTYPE html>\n<html lang=\"en\"><head><meta charset=\"utf-8\">"
      "<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">"
      "<meta name=\"color-scheme\" content=\"light dark\"><title>" +
      escaped(whole_title) +
      "</title><link rel=\"stylesheet\" href=\"/page.css\">"
      "<script src=\"/page.js\" defer></script></head><body>";
  out += "<a class=\"skip\" href=\"#main\">Skip to the contents</a><header class=\"top\"><p class=\"site\">" +
         escaped(site.empty() ? std::string("agreed") : site) + "</p>" + nav_html(input) + "</header>";
  out += "<p id=\"stale\" class=\"stale\" role=\"status\" hidden></p>";
  out += "<p id=\"live\" class=\"unseen\" aria-live=\"polite\"></p>";
  out += "<main id=\"main\" tabindex=\"-1\" data-at=\"" + to_rfc3339(input.snapshot.at) + "\">" +
         stale_html(input) + main + "</main>";
  return out + foot_html(input) + "</body></html>\n";
}

}  // namespace agreed
