// What a client sends: the head before the HTTP library, the target, the body of an acknowledgement.
#include <cstdint>
#include <cstdlib>
#include <string>

#include "daemon/http/acknowledgement.hpp"
#include "daemon/http/gate.hpp"
#include "daemon/http/target.hpp"

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  using namespace agreed;
  const std::string bytes(reinterpret_cast<const char*>(data), size);
  const GateLimits limits;
  const Gated gated = look_at(bytes, limits);
  if (gated.head_complete && gated.refusal.status == 0) {
    if (gated.head_length > limits.head + 4 || gated.body_length > limits.body) std::abort();
    // The library gets one request, the one that was looked at.
    const std::string begin = gated.method + " " + gated.target + " HTTP/1.";
    if (!gated.head.starts_with(begin) || gated.head.find("\r\n\r\n") != gated.head.size() - 4) std::abort();
    for (std::size_t i = 0; i < gated.head.size(); ++i)
      if ((gated.head[i] == '\n' && gated.head[i - 1] != '\r') || gated.head[i] == '\0') std::abort();
    if (const auto target = take_apart(gated.target)) {
      for (const std::string& segment : target->segments)
        if (segment.empty() || segment.size() > 64 || segment == ".." || segment == ".") std::abort();
    }
  }
  const AcknowledgeBody body = read_acknowledge(bytes);
  if (body.error.empty() && (body.by.empty() || body.by.size() > 100 || body.note.size() > 1000))
    std::abort();
  return 0;
}
