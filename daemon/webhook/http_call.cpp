#include "daemon/webhook/http_call.hpp"

#include <algorithm>
#include <condition_variable>
#include <memory>
#include <mutex>
#include <thread>

#include <fcntl.h>
#include <httplib.h>
#include <sys/socket.h>
#include <unistd.h>

namespace agreed {
namespace {

/// How long an interrupted call may take to notice. Only a name look-up does not notice at all.
constexpr Duration kGrace = std::chrono::milliseconds(250);

struct Url {
  std::string origin, path;
};

/// Nothing for what is no plain http(s) URL. Spaces and control characters would end up in the request's
/// head.
std::optional<Url> split_url(const std::string& url) {
  const bool known = url.rfind("http://", 0) == 0 || url.rfind("https://", 0) == 0;
  const bool clean = std::all_of(url.begin(), url.end(), [](char c) { return c > ' ' && c < '\x7f'; });
  if (!known || !clean) return std::nullopt;
  const std::size_t host = url.find("//") + 2;
  const std::size_t path = std::min(url.find_first_of("/?#", host), url.size());
  const std::string authority = url.substr(host, path - host);
  if (authority.empty() || authority.find('@') != std::string::npos) return std::nullopt;
  std::string rest = url.substr(path, std::min(url.find('#', path), url.size()) - path);
  if (rest.empty() || rest.front() != '/') rest.insert(0, 1, '/');
  return Url{url.substr(0, path), rest};
}

/// What the caller and the thread that makes the call share. A second descriptor of the call's socket is
/// kept, because shutting that one down interrupts connecting, TLS and reading alike, and because it stays
/// ours when the library closes its own.
class Call {
 public:
  ~Call() { forget_socket(); }

  void watch(int socket) {
    const std::lock_guard lock(mutex_);
    ::fcntl(socket, F_SETFD, FD_CLOEXEC);
    forget_socket();
    socket_ = ::fcntl(socket, F_DUPFD_CLOEXEC, 0);
    if (aborted_) make_useless(socket);
  }

  void abort() {
    const std::lock_guard lock(mutex_);
    aborted_ = true;
    if (socket_ >= 0) ::shutdown(socket_, SHUT_RDWR);
  }

  void head(int status, std::string retry_after) {
    const std::lock_guard lock(mutex_);
    answer_.status = status;
    answer_.retry_after = std::move(retry_after);
  }

  /// False when no more is wanted.
  bool take(const char* bytes, std::size_t count, std::size_t most) {
    const std::lock_guard lock(mutex_);
    answer_.body.append(bytes, std::min(count, most - answer_.body.size()));
    return answer_.body.size() < most;
  }

  void finish(std::string error) {
    const std::lock_guard lock(mutex_);
    answer_.error = std::move(error);
    done_ = true;
    forget_socket();
    changed_.notify_all();
  }

  bool wait(const std::stop_token& stop, Duration most) {
    std::unique_lock lock(mutex_);
    return changed_.wait_until(lock, stop, std::chrono::steady_clock::now() + most, [&] { return done_; });
  }

  [[nodiscard]] CallAnswer answer() const {
    const std::lock_guard lock(mutex_);
    return answer_;
  }

 private:
  void forget_socket() {
    if (socket_ >= 0) ::close(socket_);
    socket_ = -1;
  }

  /// A call that was aborted while it looked up a name must not be made after all: connecting will fail.
  static void make_useless(int socket) {
    const int nowhere = ::open("/dev/null", O_RDWR | O_CLOEXEC);
    if (nowhere < 0) return;
    ::dup2(nowhere, socket);
    ::close(nowhere);
  }

  mutable std::mutex mutex_;
  std::condition_variable_any changed_;
  int socket_ = -1;
  bool aborted_ = false, done_ = false;
  CallAnswer answer_;
};

std::string words_for(httplib::Error error) {
  switch (error) {
    case httplib::Error::Connection:
    case httplib::Error::BindIPAddress:
      return "no connection could be made";
    case httplib::Error::ConnectionTimeout:
      return "no connection could be made in time";
    case httplib::Error::SSLConnection:
      return "no TLS connection could be made";
    case httplib::Error::SSLLoadingCerts:
      return "the certificates of the CA file could not be loaded";
    case httplib::Error::SSLServerVerification:
      return "the endpoint's certificate could not be verified";
    case httplib::Error::Write:
      return "the connection broke while the message was sent";
    case httplib::Error::Read:
      return "the connection broke before an answer came";
    default:
      return "the call failed (" + httplib::to_string(error) + ")";
  }
}

httplib::Request library_request(const CallRequest& request, const std::string& path, std::size_t most,
                                 const std::shared_ptr<Call>& call) {
  httplib::Request sent;
  sent.method = request.method;
  sent.path = path;
  sent.body = request.body;
  for (const auto& [name, value] : request.headers) sent.headers.emplace(name, value);
  if (!request.content_type.empty()) sent.headers.emplace("Content-Type", request.content_type);
  sent.response_handler = [call](const httplib::Response& response) {
    call->head(response.status, response.get_header_value("Retry-After"));
    return true;
  };
  sent.content_receiver = [call, most](const char* bytes, std::size_t count, std::uint64_t, std::uint64_t) {
    return call->take(bytes, count, most);
  };
  return sent;
}

/// The call itself, to its end; the error in words, empty when an answer came.
std::string make_call(const CallRequest& request, const CallLimits& limits,
                      const std::shared_ptr<Call>& call) {
  const auto url = split_url(request.url);
  if (!url) return "the URL is not a plain http:// or https:// one";
  httplib::Client client(url->origin);
  if (!client.is_valid()) return "the URL is not one that can be called";
  client.set_connection_timeout(limits.connect);
  client.set_read_timeout(limits.whole);
  client.set_write_timeout(limits.whole);
  client.set_tcp_nodelay(true);
  client.set_follow_location(false);
  client.set_decompress(false);
  client.set_url_encode(false);
  client.set_socket_options([call](socket_t socket) { call->watch(socket); });
  if (request.ca_file) client.set_ca_cert_path(request.ca_file->string());
  auto sent = library_request(request, url->path, limits.answer, call);
  httplib::Response response;
  auto error = httplib::Error::Success;
  if (!client.send(sent, response, error)) return words_for(error);
  // The library calls no response_handler for an answer without a body, such as 204.
  call->head(response.status, response.get_header_value("Retry-After"));
  return "";
}

}  // namespace

CallAnswer http_call(const CallRequest& request, const CallLimits& limits, const std::stop_token& stop) {
  const auto call = std::make_shared<Call>();
  // A thread of its own: a name look-up has no time limit and cannot be interrupted, so it may have to be
  // left behind. It holds copies only.
  try {
    std::thread([call, request, limits] {
      std::string error;
      try {
        error = make_call(request, limits, call);
      } catch (const std::exception& failure) {
        error = std::string("the call failed: ") + failure.what();
      } catch (...) {
        error = "the call failed";
      }
      call->finish(std::move(error));
    }).detach();
  } catch (const std::system_error& failure) {
    CallAnswer none;
    none.error = std::string("no thread could be started for the call: ") + failure.what();
    return none;
  }
  const bool in_time = call->wait(stop, limits.whole);
  if (!in_time) {
    call->abort();
    (void)call->wait({}, kGrace);
  }
  CallAnswer answer = call->answer();
  if (answer.status != 0) {
    answer.error.clear();
  } else if (!in_time) {
    answer.stopped = stop.stop_requested();
    answer.error = answer.stopped
                       ? "the call was stopped"
                       : "no answer came within " + std::to_string(limits.whole.count() / 1000) + " s";
  }
  return answer;
}

}  // namespace agreed
