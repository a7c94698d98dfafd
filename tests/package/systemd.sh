#!/bin/sh
# The package under a real systemd, booted in a container: started, used, reloaded, hung, upgraded, removed, with the unit's walls
# in force. Needs root, systemd-nspawn, a mirror the first time, and what tests/package/run.sh made there.
#   sh tests/package/systemd.sh [build] [/var/tmp/agreed-package-test]
set -eu
source=$(cd "$(dirname "$0")/../.." && pwd)
build=$(cd "${1:-$source/build}" && pwd)
place=${2:-/var/tmp/agreed-package-test}
base=$place/systemd.tar root=$place/systemd

[ -f "$place/debian.tar" ] || { echo "run tests/package/run.sh first" >&2; exit 1; }
command -v systemd-nspawn >/dev/null || { echo "systemd-nspawn is missing; Debian has it in systemd-container" >&2; exit 1; }
[ -f "$base" ] || {
  rm -rf "$root"; mkdir -p "$root"; tar -xf "$place/base.tar" -C "$root"
  chroot "$root" env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends systemd systemd-sysv dbus curl >/dev/null
  tar -cf "$base" -C "$root" .
}
rm -rf "$root"; mkdir -p "$root"; tar -xf "$base" -C "$root"
cp "$build/agreed_0.1.0_amd64.deb" "$build/agreed_0.1.1_amd64.deb" "$root/root/"
cat >"$root/root/try.sh" <<'TRY'
#!/bin/bash
# Inside the container. The first thing that is not as it should be ends it.
exec >/root/result 2>&1
trap 'systemctl poweroff' EXIT
set -eux
api=http://127.0.0.1:7480
until_true() { for _ in $(seq 150); do if eval "$1"; then return; fi; sleep 0.2; done; echo "in vain: $1"; exit 1; }
ready() { curl -sf $api/health/ready; }
pid() { systemctl show agreed -p MainPID --value; }

dpkg -i /root/agreed_0.1.0_amd64.deb
[ "$(systemctl is-active agreed || true)" = inactive ]
mkdir -p /etc/systemd/system/agreed.service.d
printf '[Service]\nWatchdogSec=4\nRestartSec=1\n' >/etc/systemd/system/agreed.service.d/quick.conf
install -d -o agreed -g agreed -m 2775 /srv/agreed/line1 /srv/agreed/line2
systemctl daemon-reload
systemctl enable --now agreed
until_true ready

printf 'kind,measured_at,measurand,item,value\ncheck,2026-01-05T06:00:00Z,protein,wheat-low,10.6\n' >/srv/agreed/line1/a.csv
until_true "curl -s $api/api/status | grep -q '\"accepted\":1,'"
until_true 'ls /srv/agreed/line1/done/*/a.csv'

started=$(pid)
sed -i 's/Harrow Mill/Harrow Mill North/' /etc/agreed/agreed.yaml
systemctl reload agreed
until_true "curl -s $api/api/status | grep -q 'Harrow Mill North'"
echo 'nonsense: 1' >>/etc/agreed/agreed.yaml
systemctl reload agreed
until_true "ready | grep -q nonsense"
until_true '[ "$(systemctl is-active agreed)" = active ]'
journalctl -u agreed -p err --no-pager -o cat | grep -q 'agreed.yaml:[0-9]*:[0-9]*: nonsense'
sed -i '$d' /etc/agreed/agreed.yaml
[ "$(pid)" = "$started" ]

# The walls, as a process in the service's namespaces meets them.
grep -q '^CapEff:.0000000000000000' /proc/$started/status
grep -q '^NoNewPrivs:.1' /proc/$started/status
grep -q '^Seccomp:.2' /proc/$started/status
within() { nsenter -t "$started" -m -- sh -c "$1"; }
for path in /etc/x /usr/x /var/lib/x /srv/x; do if within "touch $path"; then echo "$path can be written"; exit 1; fi; done
within 'touch /srv/agreed/line1/.x /var/lib/agreed/.x'
[ -z "$(within 'ls -A /home /root' | grep -v : || true)" ]

# Signs of life hold off the watchdog; without them it ends the service, and another takes its place.
sleep 10
[ "$(systemctl show agreed -p NRestarts --value)" = 0 ]
kill -STOP "$started"
until_true '[ "$(systemctl show agreed -p NRestarts --value)" = 1 ]'
until_true ready

# To a machine that has nothing yet, step by step as deploy/moving.md says; what is dropped again there counts once.
install -d -m 0700 /backup/ /etc/agreed/secrets
systemctl disable --now agreed
agreed backup /etc/agreed/agreed.yaml /backup/agreed-move.sqlite >/root/backed-up
tar -czf /backup/agreed-move.tar.gz /etc/agreed/agreed.yaml /etc/agreed/secrets
dpkg -P agreed
rm -rf /var/lib/agreed
dpkg -i /root/agreed_0.1.0_amd64.deb
tar -xzf /backup/agreed-move.tar.gz -C /
[ "$(stat -c '%U:%G %a' /etc/agreed/agreed.yaml)" = "root:agreed 640" ]
agreed check /etc/agreed/agreed.yaml
agreed restore /etc/agreed/agreed.yaml /backup/agreed-move.sqlite
chown -R agreed:agreed /var/lib/agreed
agreed verify /etc/agreed/agreed.yaml --head "$(sed -n 's/^head *//p' /root/backed-up)"
systemctl enable --now agreed
until_true ready
mv /srv/agreed/line1/done/*/a.csv /srv/agreed/line1/again.csv
until_true 'ls /srv/agreed/line1/done/*/again.csv'
curl -s $api/api/status | grep -q 'Harrow Mill North'
curl -s $api/api/status | grep -q '"accepted":1,'

before=$(pid)
dpkg -i /root/agreed_0.1.1_amd64.deb
until_true ready
[ "$(pid)" != "$before" ]
curl -s $api/api/status | grep -q '"accepted":1,'
dpkg -r agreed
[ "$(systemctl is-active agreed || true)" != active ]
touch /root/all-of-it-works
TRY
cat >"$root/etc/systemd/system/try.service" <<'UNIT'
[Unit]
After=dbus.service
[Service]
Type=oneshot
TimeoutStartSec=300
ExecStart=/bin/bash /root/try.sh
UNIT
mkdir -p "$root/etc/systemd/system/multi-user.target.wants"
ln -s ../try.service "$root/etc/systemd/system/multi-user.target.wants/try.service"
timeout 400 systemd-nspawn --register=no --keep-unit --private-network --boot -D "$root" >"$place/boot.log" 2>&1 </dev/null || true
[ -f "$root/root/all-of-it-works" ] || { tail -40 "$root/root/result"; echo "FAILED, see $root/root/result and $place/boot.log" >&2; exit 1; }
echo "== all of it works under systemd"
