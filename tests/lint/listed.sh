#!/bin/sh
# Every source and every test on disk is in the build: a file that nobody lists is a test that never runs.
set -eu
cd "$(dirname "$0")/../.."
bad=0
for file in $(git ls-files --cached --others --exclude-standard 'core/*.cpp' 'config/*.cpp' 'daemon/*.cpp' 'tests/*.cpp'); do
  folder=$(dirname "$file")
  name=$(basename "$file")
  grep -qsE "(^|[ (/])$name([ )]|\$)" "$folder/CMakeLists.txt" "$(dirname "$folder")/CMakeLists.txt" || {
    echo "$file is in no CMakeLists.txt"; bad=1; }
done
for file in $(git ls-files --cached --others --exclude-standard 'tests/e2e/test_*.py'); do
  grep -qs "$(basename "$file" .py)" tests/e2e/CMakeLists.txt || { echo "$file is in no CMakeLists.txt"; bad=1; }
done
exit $bad
