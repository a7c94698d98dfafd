#pragma once
// Errors as RFC 9457 problem documents.
#include <string>
#include <string_view>

#include "daemon/http/message.hpp"

namespace agreed {

/// The reason phrase of a status we use (RFC 9110), for the `title`.
[[nodiscard]] const char* status_title(int status);

/// type about:blank, title, status, detail, instance (the path as sent, without the query); `field`, if it is
/// named, of the body that is at fault.
[[nodiscard]] HttpAnswer problem(int status, const std::string& detail, std::string_view target,
                                 const std::string& field = "");

/// The detail of a problem document; of another answer its status in words.
[[nodiscard]] std::string problem_detail(const HttpAnswer& answer);

}  // namespace agreed
