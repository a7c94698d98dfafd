#pragma once
// The signature of a webhook by Standard Webhooks 1.0.0: HMAC-SHA256 over "ID.TIMESTAMP.BODY".
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/instant.hpp"

namespace agreed {

/// The bytes a message is signed with. Kept apart from text so that it does not end in a log by accident.
struct SigningKey {
  std::string bytes;

  bool operator==(const SigningKey&) const = default;
};

/// A secret as a person writes it: `whsec_` and base64 of the key, or else the key's bytes as they are.
/// Throws std::invalid_argument, without the secret, when it is empty or what follows `whsec_` is not base64.
[[nodiscard]] SigningKey signing_key(std::string_view secret);

/// The value of `webhook-signature`: one "v1,BASE64" for each key, apart by a space; "" without keys.
/// `timestamp`: that of the attempt, cut to the second. Throws std::invalid_argument for an id that is empty
/// or holds a full stop, which would make the signed text ambiguous.
[[nodiscard]] std::string webhook_signature(std::string_view webhook_id, Instant timestamp,
                                            std::string_view body, std::span<const SigningKey> keys);

/// Whole seconds since 1970, as `webhook-timestamp` has them.
[[nodiscard]] std::string webhook_timestamp(Instant timestamp);

}  // namespace agreed
