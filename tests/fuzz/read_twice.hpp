#pragma once
// Reads bytes as a file, once whole and once in small blocks: both must say the same, and nothing may be
// lost.
#include <cstddef>
#include <cstdlib>
#include <memory>
#include <string>
#include <string_view>
#include <tuple>
#include <vector>

#include "daemon/intake/plain_reader.hpp"
#include "tests/support/harrow_mill.hpp"

namespace agreed::fuzz {

/// What became of a row, as text that can be compared.
struct Seen final : RowTaker {
  std::vector<std::string> rows;

  void good(Row&& row) override {
    if (row.item.empty() || !(row.value - row.value == 0)) std::abort();  // no item, or no finite result
    rows.push_back(std::to_string(row.line) + "\1" + row.item + "\1" + std::to_string(row.value) + "\1" +
                   std::to_string(row.measured_at.time_since_epoch().count()) + "\1" + row.note + row.by);
  }
  void bad(BadRow&& row) override {
    if (row.reason.empty() || row.text.size() > kMostQuotedBytes) std::abort();
    rows.push_back(std::to_string(row.line) + "\2" + std::to_string(row.column) + "\2" + row.reason);
  }
};

inline Seen seen(std::string_view text, std::size_t block, PlainSyntax syntax,
                 const std::shared_ptr<const MappedFormat>& mapped, std::string* unusable) {
  static const Settings settings = testing::harrow_mill();
  static const auto zone = std::make_shared<const LocalZone>("Europe/Dublin");
  Seen result;
  constexpr Instant kNow{std::chrono::milliseconds{1'772'323'200'000}};  // 2026-03-01
  PlainReader reader({settings, AnalyzerIndex{0}, standards_of(settings, {0}), zone, Instant{}, kNow, mapped},
                     syntax, result);
  bool go_on = true;
  while (go_on && !text.empty()) {
    go_on = reader.feed(text.substr(0, block));
    text.remove_prefix(std::min(block, text.size()));
  }
  if (go_on) reader.finish(true);
  *unusable = reader.unusable();
  if (!unusable->empty() && !result.rows.empty()) std::abort();
  return result;
}

/// `block`: of the second reading, at least 1.
inline void read_twice(std::string_view text, std::size_t block, PlainSyntax syntax,
                       const std::shared_ptr<const MappedFormat>& mapped = nullptr) {
  std::string whole_unusable, cut_unusable;
  const Seen whole = seen(text, std::size_t{64} * 1024, syntax, mapped, &whole_unusable);
  const Seen cut = seen(text, block, syntax, mapped, &cut_unusable);
  if (whole.rows != cut.rows || whole_unusable != cut_unusable) std::abort();
}

}  // namespace agreed::fuzz
