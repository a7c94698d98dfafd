#pragma once
// An alert as JSON: the `data` of a webhook, a row of /api/alerts (which adds history and deliveries) and
// what the journal keeps, so that a book can be restored from it.
#include <string>
#include <string_view>

#include "core/alert/alert.hpp"

namespace agreed {

/// Fields in the order of the API, then `started_at`, `told_at` and `held`, which only restoring needs.
/// `url`: the page of the alert's chart or comparison, else its own page; `base_url`
/// without a slash at the end. Bytes that are not UTF-8 are replaced; a number that is not finite becomes
/// null.
/// `config_sha256`: of the configuration under which this is said; empty: null.
[[nodiscard]] std::string alert_json(const Alert& alert, std::string_view base_url,
                                     std::string_view config_sha256 = {});

/// Reads back what alert_json wrote (fields it does not know are passed over); throws std::invalid_argument
/// naming the field that is missing or wrong.
[[nodiscard]] Alert alert_from_json(std::string_view text);

}  // namespace agreed
