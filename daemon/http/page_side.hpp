#pragma once
// The pages over HTTP: who may see them, signing in and out, and what their forms do.
#include <functional>
#include <string>
#include <string_view>

#include "daemon/http/message.hpp"
#include "daemon/http/page_hook.hpp"
#include "daemon/http/sessions.hpp"
#include "daemon/http/target.hpp"
#include "daemon/http/tokens.hpp"

namespace agreed {

/// Acknowledges an alert: 200, or a problem document that says why not.
using AcknowledgeHook =
    std::function<HttpAnswer(const std::string& alert, const std::string& by, const std::string& note)>;

/// A browser signs in with a token once; then a cookie (HttpOnly, SameSite=Strict) holds a random session id,
/// never the token. A form is taken only with its session's key in it. Everything works without a script:
/// forms are answered with 303 See Other. Bearer tokens open the pages too, for programs. Thread-safe.
class PageSide {
 public:
  using Clock = std::function<Sessions::Time()>;

  /// `tokens` outlives it.
  PageSide(PageHook pages, Tokens& tokens, bool reads_need_token, AcknowledgeHook acknowledge,
           Clock clock = std::chrono::steady_clock::now);

  [[nodiscard]] HttpAnswer answer(const HttpRequest& request, const Target& target);

 private:
  struct Signed {
    PageVisitor visitor;
    std::string id;  ///< of the session; empty: not signed in
  };

  [[nodiscard]] Signed who(const HttpRequest& request);
  [[nodiscard]] HttpAnswer show(const HttpRequest& request, const PageAsk& ask) const;
  [[nodiscard]] HttpAnswer submit(const HttpRequest& request, const std::string& path);
  [[nodiscard]] HttpAnswer sign_in(const HttpRequest& request, const Target& form);
  [[nodiscard]] HttpAnswer sign_out(const HttpRequest& request, const Target& form);
  [[nodiscard]] HttpAnswer acknowledge(const HttpRequest& request, const Target& form,
                                       const std::string& alert);

  const PageHook pages_;
  Tokens& tokens_;
  const bool reads_need_token_;
  const AcknowledgeHook acknowledge_;
  const Clock clock_;
  Sessions sessions_;
};

}  // namespace agreed
