#!/bin/sh
# Every C++ file is as clang-format leaves it.
set -eu
cd "$(dirname "$0")/../.."
git ls-files --cached --others --exclude-standard '*.hpp' '*.cpp' | xargs clang-format --dry-run -Werror
