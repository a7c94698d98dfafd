// The alerts as they were told, beside the findings that led to them: for replay.
#include <string>

#include "daemon/journal/journal_impl.hpp"
#include "daemon/journal/reader_impl.hpp"

namespace agreed {
namespace {

// Findings and transitions of a batch are numbered together, and a finding comes right before what was told
// of it.
constexpr const char* kFindingsAndTransitions =
    "SELECT batch, position, 0, at, kind, subject, 0 FROM findings UNION ALL "
    "SELECT batch, position, 1, at, change, body, alert FROM alert_transitions ORDER BY 1, 2";

}  // namespace

void JournalReader::each_transition(const std::function<void(PastTransition&&)>& take) {
  journal::translating(impl_->file, [&] {
    SQLite::Statement rows(*impl_->database, kFindingsAndTransitions);
    std::int64_t batch = 0;
    PastTransition past;
    while (rows.executeStep()) {
      if (const std::int64_t of = rows.getColumn(0).getInt64(); of != batch) {
        batch = of;
        past = {};
      }
      const Instant at = journal::instant(rows.getColumn(3));
      std::string what = rows.getColumn(4).getString(), text = rows.getColumn(5).getString();
      if (rows.getColumn(2).getInt() == 0) {
        past.finding_kind = std::move(what);
        past.finding_subject = std::move(text);
        past.finding_at = at;
        continue;
      }
      past.transition = {rows.getColumn(6).getInt64(), at, std::move(what), std::move(text)};
      take(PastTransition(past));
    }
  });
}

}  // namespace agreed
