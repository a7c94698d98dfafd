#pragma once
// Everything of HTTP put together: tokens, router, server.
#include <filesystem>
#include <functional>
#include <memory>
#include <optional>
#include <string>

#include "config/config.hpp"
#include "daemon/engine/service.hpp"
#include "daemon/http/alert_source.hpp"
#include "daemon/http/router.hpp"
#include "daemon/http/server.hpp"
#include "daemon/http/tokens.hpp"

namespace agreed {

class HttpSide {
 public:
  /// Listens, and answers from `start` on. `service` outlives it. `tell` is for the log, and `tell_over` for
  /// what is no longer wrong; called from several threads. Throws ListenError when the address cannot be had,
  /// std::runtime_error when it may not be used (no reader token, not opened on purpose).
  HttpSide(const Listen& listen, std::optional<std::filesystem::path> tokens_file, Service& service,
           AlertSource alerts, PageHook pages, Tokens::Tell tell, Tokens::Tell tell_over = {});

  void start() { server_->start(); }
  /// This tokens file from now on, with what is wrong with it told again; sessions of tokens that are not in
  /// it are over.
  void use_tokens(std::optional<std::filesystem::path> file) { tokens_.use(std::move(file)); }
  /// Within half a second, whoever is connected.
  void stop() noexcept { server_->stop(); }
  [[nodiscard]] int port() const { return server_->port(); }

 private:
  Tokens tokens_;
  Router router_;
  std::unique_ptr<HttpServer> server_;
};

}  // namespace agreed
