#pragma once
// Which path answers what, and who may ask: the whole HTTP surface in one table.
#include <functional>
#include <memory>
#include <optional>
#include <string>

#include "daemon/engine/service.hpp"
#include "daemon/http/alert_source.hpp"
#include "daemon/http/intake_source.hpp"
#include "daemon/http/message.hpp"
#include "daemon/http/page_hook.hpp"
#include "daemon/http/tokens.hpp"

namespace agreed {

struct RouterParts {
  Service& service;  ///< outlives the router
  Tokens& tokens;    ///< outlives the router
  AlertSource alerts;
  IntakeSource intake;
  PageHook pages;                 ///< may be empty
  bool reads_need_token = false;  ///< GET and HEAD, health excepted
  std::function<bool()> stopping = [] { return false; };
};

class Router {
 public:
  explicit Router(RouterParts parts);
  ~Router();

  /// Never a half answer: what cannot be answered is a problem document. Exceptions of the parts pass through
  /// (the server makes 500 of them). Thread-safe.
  [[nodiscard]] HttpAnswer answer(const HttpRequest& request);

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace agreed
