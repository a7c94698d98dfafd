#!/bin/sh
# Builds the service (Release, Ninja) into build/. Arguments go to CMake, e.g. -DAGREED_SANITIZE=address,undefined.
# AGREED_BUILD_DIR names another build folder, AGREED_TARGET one target instead of all. A new folder compiles the
# service's sources several at a time, which is fastest from clean; AGREED_UNITY=OFF makes one for working in.
set -eu
cd "$(dirname "$0")/.."
build=${AGREED_BUILD_DIR:-build}
[ -e "$build/CMakeCache.txt" ] || set -- "-DCMAKE_UNITY_BUILD=${AGREED_UNITY:-ON}" "$@"
cmake -S . -B "$build" -G Ninja -DCMAKE_BUILD_TYPE=Release "$@" >"${TMPDIR:-/tmp}/agreed-cmake.$$" 2>&1 || {
  cat "${TMPDIR:-/tmp}/agreed-cmake.$$"; rm -f "${TMPDIR:-/tmp}/agreed-cmake.$$"; exit 1; }
rm -f "${TMPDIR:-/tmp}/agreed-cmake.$$"
cmake --build "$build" ${AGREED_TARGET:+--target "$AGREED_TARGET"}
