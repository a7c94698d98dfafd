#include "daemon/http/page_side.hpp"

#include <openssl/crypto.h>

#include "core/base/ascii.hpp"
#include "daemon/http/access.hpp"
#include "daemon/http/etag.hpp"
#include "daemon/http/http_date.hpp"
#include "daemon/http/problem.hpp"
#include "daemon/render/page_text.hpp"

namespace agreed {
namespace {

constexpr std::string_view kCookie = "agreed_session";
constexpr std::string_view kAlert = "/alerts/", kAcknowledge = "/acknowledge";
// Who may act signs in again each shift, a screen on the wall once a month (the longest times that NIST SP
// 800-63B names for its assurance levels 2 and 1).
constexpr std::chrono::seconds kOperatorsTime = std::chrono::hours(12),
                               kReadersTime = std::chrono::hours(30 * 24);

bool wants_html(const HttpRequest& request) {
  return request.accept.find("text/html") != std::string::npos;
}

/// The value of our cookie (RFC 6265, 5.4: pairs separated by "; "); empty when there is none.
std::string session_id(std::string_view cookies) {
  while (!cookies.empty()) {
    const auto end = std::min(cookies.find(';'), cookies.size());
    const std::string_view pair = ascii::trimmed(cookies.substr(0, end));
    cookies.remove_prefix(std::min(end + 1, cookies.size()));
    if (pair.size() > kCookie.size() && pair.starts_with(kCookie) && pair[kCookie.size()] == '=')
      return std::string(pair.substr(kCookie.size() + 1));
  }
  return {};
}

std::string cookie(const std::string& id, std::chrono::seconds age) {
  return std::string(kCookie) + "=" + id + "; Max-Age=" + std::to_string(age.count()) +
         "; Path=/; HttpOnly; SameSite=Strict";
}

HttpAnswer see_other(const std::string& where) {
  HttpAnswer answer{303, "text/plain; charset=utf-8", "See " + where + "\n", "", {}};
  answer.headers.emplace_back("Location", where);
  answer.headers.emplace_back("Cache-Control", "no-store");
  return answer;
}

/// `path` if it is one of ours, else the overview: nobody is sent elsewhere by a prepared link.
std::string own_path(const std::string* path) {
  if (!path || !path->starts_with('/') || path->size() > 1024 || !take_apart(*path)) return "/";
  for (const char c : *path)
    if (c <= 0x20 || c >= 0x7f || c == '#') return "/";
  return *path;
}

std::string field(const Target& form, std::string_view name) {
  const std::string* value = form.parameter(name);
  return value ? *value : std::string();
}

bool same(std::string_view a, std::string_view b) {
  return !a.empty() && a.size() == b.size() && CRYPTO_memcmp(a.data(), b.data(), a.size()) == 0;
}

/// The way into a form's fields is the one into a query's (application/x-www-form-urlencoded is the same).
Target form_of(const HttpRequest& request) {
  return take_apart("/?" + request.body).value_or(Target{});
}

std::string plain_path(const Target& target) {
  std::string path;
  for (const std::string& segment : target.segments) path.append(1, '/').append(segment);
  return path.empty() ? "/" : path;
}

bool open_to_all(const std::string& path) {
  return path == "/sign-in" || path == "/page.css" || path == "/page.js" || path == "/page.svg";
}

/// The alert that POST of `path` acknowledges; empty when it is no such path.
std::string alert_of(const std::string& path) {
  if (path.size() <= kAlert.size() + kAcknowledge.size() || !path.starts_with(kAlert) ||
      !path.ends_with(kAcknowledge))
    return {};
  return path.substr(kAlert.size(), path.size() - kAlert.size() - kAcknowledge.size());
}

/// What may be done at `path`, for 405; empty when `method` may.
std::string allowed_instead(const HttpRequest& request, const std::string& path) {
  const bool submits = path == "/sign-out" || !alert_of(path).empty();
  if (request.method == "POST") return submits || path == "/sign-in" ? "" : "GET, HEAD";
  if (!reads(request)) return submits ? "POST" : path == "/sign-in" ? "GET, HEAD, POST" : "GET, HEAD";
  return submits ? "POST" : "";
}

}  // namespace

PageSide::PageSide(PageHook pages, Tokens& tokens, bool reads_need_token, AcknowledgeHook acknowledge,
                   Clock clock)
    : pages_(std::move(pages)),
      tokens_(tokens),
      reads_need_token_(reads_need_token),
      acknowledge_(std::move(acknowledge)),
      clock_(std::move(clock)) {}

HttpAnswer PageSide::answer(const HttpRequest& request, const Target& target) {
  const std::string path = plain_path(target);
  if (const std::string allowed = allowed_instead(request, path); !allowed.empty()) {
    HttpAnswer answer = problem(405, "Methods this path knows: " + allowed + ".", request.target);
    answer.headers.emplace_back("Allow", allowed);
    return answer;
  }
  if (request.method == "POST") return submit(request, path);
  const Signed signed_in = who(request);
  if (reads_need_token_ && !signed_in.visitor.signed_in && !open_to_all(path))
    if (auto refusal = refused(request, Role::reader, tokens_)) {
      if (!wants_html(request) || !request.authorization.empty()) return *std::move(refusal);
      return see_other("/sign-in?to=" + path_segment(own_path(&request.target)));
    }
  return show(request, {path, target.query, signed_in.visitor, {}});
}

PageSide::Signed PageSide::who(const HttpRequest& request) {
  Signed found;
  found.visitor.can_sign_in = tokens_.any();
  std::string id = session_id(request.cookie);
  const auto session = id.empty() ? std::nullopt : sessions_.find(id, clock_());
  if (!session) return found;
  const auto holder = tokens_.holder_of(session->token);
  if (!holder) {  // its line is gone: so is what was opened with it
    sessions_.close(id);
    return found;
  }
  found.visitor.signed_in = true;
  found.visitor.may_act = holder->role == Role::operator_;
  found.visitor.name = holder->name;
  found.visitor.form_key = session->form_key;
  found.id = std::move(id);
  return found;
}

HttpAnswer PageSide::show(const HttpRequest& request, const PageAsk& ask) const {
  auto page = pages_ ? pages_(ask) : std::nullopt;
  if (!page && pages_ && wants_html(request)) page = pages_({"/nothing-here", {}, ask.visitor, {}});
  if (!page) return problem(404, "There is nothing at this path.", request.target);
  HttpAnswer answer{page->status, std::move(page->content_type), std::move(page->body), "", {}};
  answer.etag = page->etag.empty() ? etag_of(answer.body) : std::move(page->etag);
  if (page->renewed_at)
    answer.headers.emplace_back("Last-Modified",
                                http_date(std::chrono::system_clock::to_time_t(*page->renewed_at)));
  answer.headers.emplace_back("Vary", "Cookie");
  return answer;
}

HttpAnswer PageSide::submit(const HttpRequest& request, const std::string& path) {
  const Target form = form_of(request);
  if (path == "/sign-in") return sign_in(request, form);
  if (path == "/sign-out") return sign_out(request, form);
  return acknowledge(request, form, alert_of(path));
}

HttpAnswer PageSide::sign_in(const HttpRequest& request, const Target& form) {
  const std::string to = own_path(form.parameter("to"));
  const Sha256::Digest token = sha256(ascii::trimmed(field(form, "token")));
  const auto holder = tokens_.holder_of(token);
  if (!holder)
    return show(request,
                {"/sign-in", "to=" + path_segment(to), who(request).visitor, "This token is not known."});
  const auto lasts = holder->role == Role::operator_ ? kOperatorsTime : kReadersTime;
  HttpAnswer answer = see_other(to);
  // A new id at each sign-in: one that somebody else may have set before is worth nothing.
  if (const Signed before = who(request); !before.id.empty()) sessions_.close(before.id);
  answer.headers.emplace_back("Set-Cookie", cookie(sessions_.open(token, clock_() + lasts), lasts));
  return answer;
}

HttpAnswer PageSide::sign_out(const HttpRequest& request, const Target& form) {
  const Signed signed_in = who(request);
  if (!signed_in.id.empty()) {
    if (!same(field(form, "form_key"), signed_in.visitor.form_key))
      return show(request, {"/not-taken", {}, signed_in.visitor, "The form was not one of this session."});
    sessions_.close(signed_in.id);
  }
  HttpAnswer answer = see_other("/");
  answer.headers.emplace_back("Set-Cookie", cookie("", std::chrono::seconds(0)));
  return answer;
}

HttpAnswer PageSide::acknowledge(const HttpRequest& request, const Target& form, const std::string& alert) {
  const std::string back = own_path(form.parameter("back"));
  const Signed signed_in = who(request);
  if (signed_in.id.empty()) return see_other("/sign-in?to=" + path_segment(back));
  const auto not_taken = [&](const std::string& why) {
    return show(request, {"/not-taken", {}, signed_in.visitor, why});
  };
  if (!same(field(form, "form_key"), signed_in.visitor.form_key))
    return not_taken("The form was not one of this session; nothing was acknowledged. Load the page anew.");
  if (!signed_in.visitor.may_act)
    return not_taken("Acknowledging takes an operator's token; this one may only read.");
  const HttpAnswer done = acknowledge_(alert, field(form, "by"), field(form, "note"));
  if (done.status == 200) return see_other(back + "#" + alert);
  HttpAnswer answer = not_taken("Alert " + alert + " was not acknowledged. " + problem_detail(done));
  answer.status = done.status;
  return answer;
}

}  // namespace agreed
