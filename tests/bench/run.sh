#!/bin/sh
# Measures the budgets beside their references in one run. Takes some minutes; give it an idle machine.
set -eu
cd "$(dirname "$0")/../.."
sh deploy/setup.sh
sh deploy/build.sh >/dev/null
exec /usr/bin/python3 tests/bench/bench.py "$@"
