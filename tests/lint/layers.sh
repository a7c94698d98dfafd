#!/bin/sh
# core <- config <- daemon: no include points the other way; core does no I/O, starts no thread and asks no clock.
set -eu
cd "$(dirname "$0")/../.."
bad=0
complain() { if [ -n "$2" ]; then printf '%s:\n%s\n' "$1" "$2"; bad=1; fi; }
complain "core/ includes an outer room" "$(grep -rnE '#include *"(config|daemon|tests)/' core || true)"
complain "config/ includes an outer room" "$(grep -rnE '#include *"(daemon|tests)/' config || true)"
complain "core/ reaches for I/O, threads, logging or a library of the shell" "$(grep -rnE \
  '#include *<(iostream|fstream|ostream|istream|sstream|filesystem|thread|mutex|atomic|future|condition_variable|unistd\.h|sys/.*|SQLiteCpp.*|sqlite3\.h|httplib\.h|yaml-cpp.*|spdlog.*|fmt.*|nlohmann.*|ctime|time\.h|date/.*)>' \
  core || true)"
complain "core/ asks the time" "$(grep -rnE '::now\(|[^_a-z]time\((nullptr|NULL|0)\)|gettimeofday|clock_gettime|localtime|gmtime' core || true)"
complain "config/ reaches for SQL, HTTP or logging" "$(grep -rnE '#include *<(SQLiteCpp.*|sqlite3\.h|httplib\.h|spdlog.*)>' config || true)"
exit $bad
