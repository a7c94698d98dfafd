#pragma once
// agreed verify, backup and restore: what people do with the journal's file.
#include "daemon/cli/command_line.hpp"

namespace agreed {

/// Prints whether anything in the journal was changed or is missing; kDone if nothing, kAnswerIsNo if
/// something, kWrongUse for a wrong configuration, kCouldNotDoIt if the journal could not be read.
int verify_command(const VerifyCommand& command);

/// Copies the journal, also of a running service; kAnswerIsNo: copied, but the copy has faults (so has the
/// journal).
int backup_command(const BackupCommand& command);

/// Puts a backup in the journal's place; kAnswerIsNo: nothing was done because the backup has faults.
int restore_command(const RestoreCommand& command);

}  // namespace agreed
