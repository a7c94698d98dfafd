#pragma once
// The agreement record of a period: everything an auditor or the other party asks for, gathered from the
// journal through a read-only connection.
#include <string>
#include <vector>

#include "config/config.hpp"
#include "daemon/engine/snapshot.hpp"
#include "daemon/journal/verify.hpp"
#include "daemon/report/course.hpp"

namespace agreed {

struct PeriodRecord {
  ReportPeriod period;
  Instant made_at{};
  std::string config_file, config_sha256;
  std::string source;  ///< of the journal
  JournalProof proof;  ///< of the whole journal, when the record was made
  Snapshot snapshot;   ///< settings, charts and comparisons as they stood at the period's end
  PeriodCourse course;
  std::vector<AlertRecord> alerts;                 ///< open or acknowledged at some time of it, oldest first
  std::vector<JournalIntervention> interventions;  ///< done in it
  std::vector<FileRow> files;                      ///< received in it
  std::vector<RejectedRow> rejected;               ///< every rejected row of those
  std::vector<RecordedConfiguration> configurations;  ///< in use in it, the first maybe from before

  /// Whether anything at all was measured or received in it.
  [[nodiscard]] bool empty() const;
};

/// Throws JournalError.
[[nodiscard]] PeriodRecord gather_record(JournalReader& reader, const Config& config,
                                         const ReportPeriod& period, Instant now);

/// The alert as it stood at the end of the period (with what was known of it then), and as it stands now.
struct AlertThen {
  Alert then, now;
};
[[nodiscard]] AlertThen alert_at_end(const AlertRecord& record, const ReportPeriod& period);

}  // namespace agreed
