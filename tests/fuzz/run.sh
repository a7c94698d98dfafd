#!/bin/sh
# Builds the fuzz targets and runs each for so many seconds (10 unless told otherwise), from the seeds in corpus/ and
# what earlier runs found: sh tests/fuzz/run.sh [SECONDS [TARGET...]]. A crash ends it with the input's file name.
set -eu
cd "$(dirname "$0")/../.."
seconds="${1:-10}"
[ $# -gt 0 ] && shift
build="${AGREED_FUZZ_DIR:-build-fuzz}"
mkdir -p "$build"
cmake -S . -B "$build" -G Ninja -DAGREED_FUZZ=ON -DCMAKE_BUILD_TYPE=None -DCMAKE_CXX_COMPILER=clang++ -DCMAKE_C_COMPILER=clang \
  > "$build/configure.log" || { cat "$build/configure.log"; exit 1; }
cmake --build "$build" > "$build/build.log" || { tail -60 "$build/build.log"; exit 1; }
run() {
  mkdir -p "$build/found/$1"
  "$build/tests/fuzz/fuzz_$1" -max_total_time="$seconds" -max_len=4096 -timeout=20 -rss_limit_mb=2048 \
    -artifact_prefix="$build/crash-$1-" "$build/found/$1" "tests/fuzz/corpus/$1" > "$build/fuzz_$1.log" 2>&1
}
targets="${*:-csv json_lines json_array mapped config http}"
mkdir -p "$build/clean"
# As many at a time as there are processors.
started=0
for target in $targets; do
  rm -f "$build/clean/$target"
  (if run "$target"; then : > "$build/clean/$target"; fi) &
  started=$((started + 1))
  [ $((started % $(nproc))) -ne 0 ] || wait
done
wait
bad=0
for target in $targets; do
  if [ -e "$build/clean/$target" ]; then
    echo "fuzz_$target: $(grep -o 'Done [0-9]* runs in [0-9]* second(s)' "$build/fuzz_$target.log")"
  else
    tail -40 "$build/fuzz_$target.log"
    echo "fuzz_$target found a fault; the input is in $build/crash-$target-*"
    bad=1
  fi
done
exit $bad
