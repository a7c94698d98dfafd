#!/bin/sh
# Every header compiles alone (needs the compile commands of a configured build).
set -eu
cd "$(dirname "$0")/../.."
flags="-std=c++20 -fsyntax-only -I. $(pkg-config --cflags cpp-httplib) -DSPDLOG_COMPILED_LIB -DSPDLOG_FMT_EXTERNAL -DAGREED_VERSION=\"0\""
git ls-files --cached --others --exclude-standard 'core/*.hpp' 'config/*.hpp' 'daemon/*.hpp' |
  xargs -P 2 -I '{}' sh -c "g++ $flags -x c++ -include '{}' /dev/null || { echo '{} does not compile alone'; exit 255; }"
