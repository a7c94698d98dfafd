#!/bin/sh
# Sets up, builds and runs all tests. AGREED_TESTS="quick e2e" runs only those labels (quick, e2e, slow).
set -eu
cd "$(dirname "$0")/.."
sh deploy/setup.sh
sh deploy/build.sh
labels=${AGREED_TESTS:-quick e2e slow}
pattern=$(printf '%s' "$labels" | sed 's/  */|/g')
cd "${AGREED_BUILD_DIR:-build}"
# One more at a time than processors: many of them mostly wait.
exec ctest --output-on-failure -j"$(($(nproc) + 1))" -L "^($pattern)\$"
