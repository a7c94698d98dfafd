#pragma once
// GET /health/live and GET /health/ready.
#include <string>
#include <vector>

namespace agreed {

[[nodiscard]] std::string live_json();
/// `remarks`: what is wrong although the service is ready.
[[nodiscard]] std::string ready_json(const std::vector<std::string>& remarks);

/// A problem document (RFC 9457) of status 503 with the reasons beside it.
[[nodiscard]] std::string not_ready_json(const std::vector<std::string>& reasons,
                                         const std::string& instance);

}  // namespace agreed
