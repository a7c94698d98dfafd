#!/bin/sh
# clang-tidy over the service's own sources, with the checks of .clang-tidy.
set -eu
exec python3 "$(dirname "$0")/tidy.py"
