#include "daemon/http/http_side.hpp"

#include "daemon/http/access.hpp"

namespace agreed {

HttpSide::HttpSide(const Listen& listen, std::optional<std::filesystem::path> tokens_file, Service& service,
                   AlertSource alerts, PageHook pages, Tokens::Tell tell, Tokens::Tell tell_over)
    : tokens_(std::move(tokens_file), tell, std::move(tell_over)),
      router_({service, tokens_, std::move(alerts), journal_intake(service.state()), std::move(pages),
               reads_need_token(listen), [this] { return server_ && server_->stopping(); }}) {
  (void)tokens_.trouble();  // told at the start, not when somebody first needs a token
  require_reader_token(listen, tokens_);
  server_ = std::make_unique<HttpServer>(
      listen, [this](const HttpRequest& request) { return router_.answer(request); }, std::move(tell));
}

}  // namespace agreed
