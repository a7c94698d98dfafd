#include "daemon/http/responder.hpp"

#include <cstring>
#include <ctime>

#include <httplib.h>

#include "daemon/http/http_date.hpp"
#include "daemon/http/problem.hpp"

namespace agreed {
namespace {

/// What the library reads its request from, and writes its answer to: both in memory, so that it never waits
/// for a client and the answer goes out in one piece.
class MemoryStream final : public httplib::Stream {
 public:
  explicit MemoryStream(std::string_view input) : input_(input) {}

  [[nodiscard]] bool is_readable() const override { return !input_.empty(); }
  [[nodiscard]] bool is_writable() const override { return true; }
  ssize_t read(char* to, size_t size) override {
    const std::size_t count = std::min(size, input_.size());
    std::memcpy(to, input_.data(), count);
    input_.remove_prefix(count);
    return static_cast<ssize_t>(count);
  }
  ssize_t write(const char* from, size_t size) override {
    output_.append(from, size);
    return static_cast<ssize_t>(size);
  }
  void get_remote_ip_and_port(std::string&, int&) const override {}
  void get_local_ip_and_port(std::string&, int&) const override {}
  [[nodiscard]] socket_t socket() const override { return INVALID_SOCKET; }

  std::string take_output() { return std::move(output_); }

 private:
  std::string_view input_;
  std::string output_;
};

/// A field of the head that the gate made, as it was sent; empty when it is not there. The library would undo
/// percent escapes in it: a token with a % would be another one, and %0D%0A would become a line end.
std::string field_of(std::string_view head, std::string_view name) {
  const std::string begin = std::string("\r\n").append(name).append(": ");
  const auto found = head.find(begin);
  if (found == std::string_view::npos) return {};
  const auto value = head.substr(found + begin.size());
  return std::string(value.substr(0, value.find("\r\n")));
}

HttpRequest request_of(const httplib::Request& from, std::string_view head) {
  return {from.method,
          from.target,
          field_of(head, "authorization"),
          field_of(head, "if-none-match"),
          field_of(head, "accept"),
          field_of(head, "cookie"),
          from.body};
}

void fill(httplib::Response& response, HttpAnswer answer) {
  response.status = answer.status;
  response.body = std::move(answer.body);
  if (!answer.content_type.empty() && answer.status != 304)
    response.set_header("Content-Type", answer.content_type);
  if (!answer.etag.empty()) response.set_header("ETag", answer.etag);
  for (const auto& [name, value] : answer.headers) response.set_header(name, value);
  response.set_header("Date", http_date(std::time(nullptr)));
}

}  // namespace

/// The library's own server, used for what it does well: reading a small clean request and writing an answer.
/// It never has a socket.
class Responder::Library final : public httplib::Server {
 public:
  Library(HttpHandler handler, std::function<void(const std::string&)> tell, std::chrono::seconds idle,
          int requests)
      : handler_(std::move(handler)), tell_(std::move(tell)) {
    set_keep_alive_timeout(idle.count());
    set_keep_alive_max_count(static_cast<std::size_t>(requests));
    set_default_headers({{"Content-Security-Policy",
                          "default-src 'self'; base-uri 'none'; form-action 'self'; frame-ancestors 'none'"},
                         {"X-Content-Type-Options", "nosniff"},
                         {"Referrer-Policy", "no-referrer"},
                         {"Cache-Control", "no-cache"},
                         {"Accept-Ranges", "none"}});
    // Before the library's routing, whose patterns are regular expressions that a long path can crash.
    set_pre_routing_handler([this](const httplib::Request& request, httplib::Response& response) {
      fill(response, refusal_ ? problem(refusal_->status, refusal_->detail, target_) : answer_to(request));
      return HandlerResponse::Handled;
    });
  }

  std::string process(std::string_view head, std::string_view body, bool close) {
    MemoryStream stream(head);
    head_ = head;
    bool closed = false;
    process_request(stream, close, closed, [&](httplib::Request& request) { request.body = body; });
    return stream.take_output();
  }

  std::string process_refusal(const Gated& request) {
    refusal_ = &request.refusal;
    target_ = request.target;
    std::string answer =
        process(request.method == "HEAD" ? "HEAD / HTTP/1.1\r\n\r\n" : "GET / HTTP/1.1\r\n\r\n", {}, true);
    refusal_ = nullptr;
    return answer;
  }

 private:
  HttpAnswer answer_to(const httplib::Request& from) const {
    const HttpRequest request = request_of(from, head_);
    std::string what = "an exception of unknown type";
    try {
      return handler_(request);
    } catch (const std::exception& error) {
      what = error.what();
    } catch (...) {  // told below like any other
    }
    tell_("HTTP " + request.method + " could not be answered: " + what);
    return problem(500, "The request could not be answered; the service's log says why.", request.target);
  }

  const HttpHandler handler_;
  const std::function<void(const std::string&)> tell_;
  const Refusal* refusal_ = nullptr;
  std::string_view target_;
  std::string_view head_;  ///< of the request being answered
};

Responder::Responder(HttpHandler handler, std::function<void(const std::string&)> tell,
                     std::chrono::seconds idle, int requests)
    : library_(std::make_unique<Library>(std::move(handler), std::move(tell), idle, requests)) {}
Responder::~Responder() = default;

std::string Responder::respond(const Gated& request, std::string_view body, bool close) {
  return library_->process(request.head, body, close);
}

std::string Responder::refuse(const Gated& request) {
  return library_->process_refusal(request);
}

}  // namespace agreed
