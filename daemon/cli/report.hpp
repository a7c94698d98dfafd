#pragma once
// agreed report: the agreement record of a period, for an auditor or the other party.
#include "daemon/cli/command_line.hpp"

namespace agreed {

/// Writes FILE.html and its tables FILE.csv (readings), FILE.pairs.csv and FILE.rejected.csv, none of which
/// may exist. kAnswerIsNo: they are written, but the period holds nothing or the journal is not as it was
/// written; kWrongUse: the period is none, or a file exists.
int report_command(const ReportCommand& command);

}  // namespace agreed
