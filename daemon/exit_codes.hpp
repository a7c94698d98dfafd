#pragma once
// What the exit status of agreed means.

namespace agreed {

enum ExitCode : int {
  kDone = 0,         ///< done, or the answer is yes
  kAnswerIsNo = 1,   ///< done, and the answer is no
  kWrongUse = 2,     ///< a wrong command line or configuration
  kCouldNotDoIt = 3  ///< port in use, state folder taken, journal unreadable, ...
};

}  // namespace agreed
