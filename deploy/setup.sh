#!/bin/sh
# Installs what a fresh Debian 12 machine lacks to build, run and test agreed. Quiet when nothing is missing.
set -eu
packages="g++ cmake ninja-build ccache pkg-config git
  libsqlitecpp-dev libsqlite3-dev sqlite3 libcpp-httplib-dev libssl-dev zlib1g-dev libbrotli-dev
  libyaml-cpp-dev libspdlog-dev libfmt-dev doctest-dev libeigen3-dev nlohmann-json3-dev libboost-dev
  libboost-math-dev libcli11-dev libcsv-dev libhowardhinnant-date-dev libsystemd-dev libre2-dev tzdata
  clang clang-format clang-tidy libclang-rt-14-dev python3 python3-numpy python3-scipy
  python3-prometheus-client python3-jsonschema curl openssl procps man-db mandoc wrk nginx chromium systemd"
missing=""
for package in $packages; do
  dpkg-query -W -f='${db:Status-Status}' "$package" 2>/dev/null | grep -qx installed || missing="$missing $package"
done
[ -z "$missing" ] && exit 0
as_root=""
[ "$(id -u)" = 0 ] || as_root=sudo
echo "installing:$missing"
$as_root apt-get update -qq
$as_root env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends $missing >/dev/null
