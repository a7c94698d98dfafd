#pragma once
// What commands print with --json. Included by their sources only, because it brings in the JSON library.
#include <fmt/format.h>
#include <nlohmann/json.hpp>

namespace agreed {

/// On the standard output, for people too; bytes that are not UTF-8 become the replacement character.
inline void print_json(const nlohmann::ordered_json& json) {
  fmt::print("{}\n", json.dump(2, ' ', false, nlohmann::ordered_json::error_handler_t::replace));
}

}  // namespace agreed
