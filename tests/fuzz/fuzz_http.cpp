// What a client sends over one connection: heads before they reach the HTTP library, bodies, targets with
// their parameters, the Accept field, the body of an acknowledgement; and the one header we read of others'
// answers.
#include <cstdint>
#include <cstdlib>
#include <string>

#include "daemon/http/acknowledgement.hpp"
#include "daemon/http/gate.hpp"
#include "daemon/http/intake_parameters.hpp"
#include "daemon/http/media_type.hpp"
#include "daemon/http/parameters.hpp"
#include "daemon/http/target.hpp"
#include "daemon/webhook/retry_after.hpp"

namespace {
using namespace agreed;

void must(bool holds) {
  if (!holds) std::abort();
}

void check_parameters(const Target& target) {
  if (const auto count = count_parameter(target, "points"); count.error.empty())
    must(count.value >= 1 && count.value <= 500);
  if (const auto alerts = alert_query(target); alerts.error.empty())
    must(alerts.value.limit >= 1 && alerts.value.limit <= 500);
  if (const auto files = file_query(target); files.error.empty())
    must(files.value.limit >= 1 && files.value.limit <= 500);
  if (const auto readings = reading_query(target); readings.error.empty())
    must(readings.value.limit >= 1 && readings.value.limit <= 5000);
  // The link to the next page is again a target with the same path, and cannot leave its header field.
  const std::string next = next_page(target, "cursor");
  const std::string_view query = std::string_view(next).substr(target.path.size());
  must(query.find_first_of(std::string_view("\r\n\0<> ", 6)) == std::string_view::npos);
  const auto again = take_apart(next);
  must(again.has_value() && again->segments == target.segments);
  const std::string* cursor = again->parameter("after");
  must(cursor != nullptr && *cursor == "cursor");
}

void check_target(const std::string& text) {
  const auto target = take_apart(text);
  if (!target) return;
  for (const std::string& segment : target->segments)
    must(!segment.empty() && segment.size() <= 64 && segment != ".." && segment != ".");
  check_parameters(*target);
}

/// The library gets one request, the one that was looked at.
void check_passed_on(const Gated& gated, const GateLimits& limits) {
  must(gated.head_length <= limits.head + 4 && gated.body_length <= limits.body);
  must(gated.head.starts_with(gated.method + " " + gated.target + " HTTP/1."));
  must(gated.head.find("\r\n\r\n") == gated.head.size() - 4);
  for (std::size_t i = 0; i < gated.head.size(); ++i)
    must((gated.head[i] != '\n' || gated.head[i - 1] == '\r') && gated.head[i] != '\0');
  check_target(gated.target);
}

/// Requests one after the other, as over one connection, until one is refused or not whole.
void check_connection(std::string_view bytes) {
  const GateLimits limits;
  while (!bytes.empty()) {
    const Gated gated = look_at(bytes, limits);
    if (!gated.head_complete || gated.refusal.status != 0) {
      must(gated.head_complete || gated.refusal.status != 0 || bytes.size() <= limits.head);
      return;
    }
    check_passed_on(gated, limits);
    const std::size_t length = gated.head_length + gated.body_length;
    must(length > 0);
    if (bytes.size() < length) return;
    bytes.remove_prefix(length);
  }
}

void check_acknowledgement(const std::string& bytes) {
  const AcknowledgeBody body = read_acknowledge(bytes);
  if (body.error.empty()) must(!body.by.empty() && body.by.size() <= 100 && body.note.size() <= 1000);
}

}  // namespace

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  const std::string bytes(reinterpret_cast<const char*>(data), size);
  check_connection(bytes);
  check_target(bytes);
  check_acknowledgement(bytes);
  (void)prefers_csv(bytes);
  if (const auto wait = parse_retry_after(bytes, Instant{}))
    must(*wait >= Duration::zero() && *wait <= std::chrono::hours(24 * 365));
  return 0;
}
