#pragma once
// From a row of the plain format to what it means: every rule of the format that concerns one row.
#include <memory>
#include <string>
#include <vector>

#include "config/mapped_format.hpp"
#include "core/base/settings.hpp"
#include "daemon/intake/local_zone.hpp"
#include "daemon/intake/plain_columns.hpp"

namespace agreed {

/// What must be known of the service to read one analyzer's rows. `settings` must outlive the reader.
struct PlainContext {
  const Settings& settings;
  AnalyzerIndex analyzer;                 ///< of the folder
  std::vector<StandardIndex> standards;   ///< check standards run on it, ascending
  std::shared_ptr<const LocalZone> zone;  ///< of times without an offset; never null
  Instant not_before{};                   ///< rows measured before are refused
  Instant now{};                          ///< rows measured more than 5 min after it are refused
  std::shared_ptr<const MappedFormat> mapped =
      nullptr;  ///< how its files are written; null: the plain format
};

/// The check standards that have a chart on `analyzer`, ascending.
[[nodiscard]] std::vector<StandardIndex> standards_of(const Settings& settings, AnalyzerIndex analyzer);

class RowMaker {
 public:
  explicit RowMaker(PlainContext context) : context_(std::move(context)) {}

  /// Gives `taker` one Row, two for a row with both sides of a pair, or one BadRow.
  void make(const RawRow& raw, RowTaker& taker) const;
  void set_now(Instant now) { context_.now = now; }

 private:
  PlainContext context_;
};

}  // namespace agreed
