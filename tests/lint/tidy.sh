#!/bin/sh
# clang-tidy over the service's own sources, with the checks of .clang-tidy.
set -eu
cd "$(dirname "$0")/../.."
git ls-files --cached --others --exclude-standard 'core/*.cpp' 'config/*.cpp' 'daemon/*.cpp' |
  xargs -P 2 -n 4 clang-tidy -p "${AGREED_BUILD_DIR:-build}" --quiet 2>/dev/null
