#!/bin/sh
# The Debian package in a Debian 12 of its own: installed, used, upgraded, removed, purged. Needs root, debootstrap and a mirror
# the first time. Arguments: the build folder; the folder for the chroot.
#   sh tests/package/run.sh [build] [/var/tmp/agreed-package-test]
# AGREED_PACKAGE_OVERLAY=1: on this machine's own system instead, under an overlay that is thrown away. Needs no mirror and takes
# seconds, but does not see whether the package names every library it needs.
set -eu
source=$(cd "$(dirname "$0")/../.." && pwd)
build=$(cd "${1:-$source/build}" && pwd)
place=${2:-/var/tmp/agreed-package-test}
base=$place/base.tar root=$place/root
mirror=${AGREED_MIRROR:-http://deb.debian.org/debian}

say() { echo "== $*"; }
fail() { echo "FAILED: $*" >&2; exit 1; }
inside() { chroot "$root" env DEBIAN_FRONTEND=noninteractive LC_ALL=C PATH=/usr/sbin:/usr/bin:/sbin:/bin "$@"; }
clear_away() {
  if [ -f "$place/pid" ]; then
    kill "$(cat "$place/pid")" 2>/dev/null || true
    wait || true
  fi
  rm -f "$place/pid"
  umount "$root/proc" 2>/dev/null || true
  if [ -n "${AGREED_PACKAGE_OVERLAY:-}" ]; then
    umount "$root" 2>/dev/null || true
    umount "$place/layer" 2>/dev/null || true
  fi
}
trap clear_away EXIT

say "two packages of this build, the second a version later"
cd "$build"
cpack >/dev/null
cpack -D CPACK_PACKAGE_VERSION=0.1.1 >/dev/null
old=agreed_0.1.0_amd64.deb new=agreed_0.1.1_amd64.deb
dpkg-deb --field $old Depends
if command -v lintian >/dev/null; then
  say "lintian"
  lintian --fail-on error --tag-display-limit 0 $old
fi

say "a Debian 12"
mkdir -p "$place"
bootstrapped() {
  [ -f "$place/debian.tar" ] || {
    command -v debootstrap >/dev/null || fail "debootstrap is missing; Debian has it in a package of that name"
    rm -rf "$root"
    debootstrap --variant=minbase bookworm "$root" "$mirror" >"$place/debootstrap.log" || fail "debootstrap, see $place/debootstrap.log"
    tar -cf "$place/debian.tar" -C "$root" .
  }
  [ -f "$base" ] || {
    rm -rf "$root"; mkdir -p "$root"; tar -xf "$place/debian.tar" -C "$root"
    inside apt-get update -qq
    # Its libraries, so that the next run needs no mirror; the package itself comes later.
    cp "$old" "$root/tmp/"
    inside apt-get install -y -qq --no-install-recommends "/tmp/$old" >/dev/null
    inside apt-get purge -y -qq agreed >/dev/null
    rm -rf "$root/var/lib/agreed" "$root/etc/agreed"
    inside deluser --quiet agreed
    tar -cf "$base" -C "$root" .
  }
  rm -rf "$root"; mkdir -p "$root"; tar -xf "$base" -C "$root"
}
overlaid() {
  mkdir -p "$place/layer" "$root"
  mount -t tmpfs -o size=512m tmpfs "$place/layer"
  mkdir "$place/layer/upper" "$place/layer/work"
  mount -t overlay -o "lowerdir=/,upperdir=$place/layer/upper,workdir=$place/layer/work" overlay "$root"
  mkdir -p "$root/tmp"
}
if [ -n "${AGREED_PACKAGE_OVERLAY:-}" ]; then overlaid; else bootstrapped; fi
cp $old $new "$root/tmp/"
mount -t proc proc "$root/proc"

say "install"
inside dpkg -i /tmp/$old >"$place/dpkg.log" 2>&1 || { cat "$place/dpkg.log"; fail "install"; }
inside id agreed
[ "$(inside stat -c '%U:%G %a' /etc/agreed/agreed.yaml)" = "root:agreed 640" ] || fail "who may read the configuration"
[ "$(inside stat -c '%U:%G %a' /etc/agreed)" = "root:agreed 750" ] || fail "who may read /etc/agreed"
inside agreed check /etc/agreed/agreed.yaml >/dev/null || fail "the example configuration"
if inside ldd /usr/bin/agreed | grep 'not found'; then fail "a library is missing"; fi
[ -f "$root/lib/systemd/system/agreed.service" ] || fail "the unit"

# As the unit starts it, but for systemd: the user, the state folder.
as_service() { chroot --userspec=agreed:agreed "$root" /usr/bin/agreed "$@"; }
port=$(python3 -c 'import socket; s = socket.socket(); s.bind(("127.0.0.1", 0)); print(s.getsockname()[1])')
start() {
  chroot --userspec=agreed:agreed "$root" /usr/bin/agreed run /etc/agreed/agreed.yaml >"$place/out" 2>"$place/log" &
  echo $! >"$place/pid"
  for _ in $(seq 300); do
    curl -sf "http://127.0.0.1:$port/health/ready" >/dev/null && return
    sleep 0.1
  done
  cat "$place/log"; fail "the service did not get ready"
}
stop() { kill "$(cat "$place/pid")"; wait "$(cat "$place/pid")" || fail "the service did not end well"; rm "$place/pid"; }
accepted() { curl -sf "http://127.0.0.1:$port/api/status" | python3 -c 'import json, sys; print(json.load(sys.stdin)["intake"]["readings"]["accepted"])'; }
drop() { printf 'kind,measured_at,measurand,item,value\ncheck,%s,protein,wheat-low,10.6\n' "$2" >"$root/srv/agreed/line1/.$1"
         mv "$root/srv/agreed/line1/.$1" "$root/srv/agreed/line1/$1"; }
wait_for() { for _ in $(seq 300); do [ "$(accepted)" = "$1" ] && return; sleep 0.1; done; fail "$1 readings were expected"; }

say "use"
inside sed -i "s/port: 7480/port: $port/; s/Harrow Mill/Harrow Mill North/" /etc/agreed/agreed.yaml
inside install -d -o agreed -g agreed -m 2775 /srv/agreed/line1 /srv/agreed/line2
inside install -d -o agreed -g agreed -m 0750 /var/lib/agreed
start; drop a.csv 2026-01-05T06:00:00Z; wait_for 1; stop

say "upgrade"
inside dpkg -i /tmp/$new >"$place/dpkg.log" 2>&1 </dev/null || { cat "$place/dpkg.log"; fail "upgrade"; }
inside grep -q 'Harrow Mill North' /etc/agreed/agreed.yaml || fail "the upgrade changed the configuration"
[ "$(inside stat -c '%U:%G %a' /etc/agreed/agreed.yaml)" = "root:agreed 640" ] || fail "who may read the configuration, after the upgrade"
start; [ "$(accepted)" = 1 ] || fail "the journal after the upgrade"
drop b.csv 2026-01-05T14:00:00Z; wait_for 2; stop
as_service verify /etc/agreed/agreed.yaml >/dev/null || fail "verify"

say "a journal of a schema this program does not know is left alone"
cp -a "$root/var/lib/agreed/journal.sqlite" "$place/journal.sqlite"
sqlite3 "$root/var/lib/agreed/journal.sqlite" 'PRAGMA user_version = 999'
if as_service run /etc/agreed/agreed.yaml >/dev/null 2>"$place/log"; then fail "a newer schema was not refused"; fi
cp -a "$place/journal.sqlite" "$root/var/lib/agreed/journal.sqlite"

say "remove, install again"
inside dpkg -r agreed >/dev/null
[ ! -e "$root/usr/bin/agreed" ] || fail "remove left the executable"
[ -f "$root/etc/agreed/agreed.yaml" ] && [ -f "$root/var/lib/agreed/journal.sqlite" ] || fail "remove took configuration or journal"
inside dpkg -i /tmp/$new >"$place/dpkg.log" 2>&1 || { cat "$place/dpkg.log"; fail "install again"; }
start; [ "$(accepted)" = 2 ] || fail "the journal after install again"; stop

say "purge"
inside dpkg -P agreed
[ ! -e "$root/etc/agreed" ] || fail "purge left the configuration"
[ -f "$root/var/lib/agreed/journal.sqlite" ] || fail "purge took the journal"
left=$(inside find /usr /lib /etc -name '*agreed*' 2>/dev/null | grep -v -e '/etc/\(passwd\|group\|shadow\|gshadow\|subuid\|subgid\)' || true)
[ -z "$left" ] || fail "purge left $left"
say "all of it works"
