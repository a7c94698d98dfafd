#pragma once
// The data of an agreement record as tables (RFC 4180, as readings_csv writes them).
#include <ostream>
#include <string>

#include "daemon/report/period_record.hpp"

namespace agreed {

/// Every stored reading measured in the period, voided and censored ones too, with its file and line.
void write_readings(std::ostream& out, JournalReader& reader, const ReportPeriod& period);
/// Every pair of every comparison, with the verdict and the biases as they stood with it.
void write_pairs(std::ostream& out, const PeriodRecord& record);
/// Every rejected row of the files received in the period.
void write_rejected(std::ostream& out, const PeriodRecord& record);

}  // namespace agreed
