#!/bin/sh
# The main job on the demo: the real service on real files. Ends with Ctrl-C, or with --for SECONDS (counted from ready)
# by itself: exit 0 if the drift of line2 was caught and told, else 1.
set -eu
cd "$(dirname "$0")/.."
seconds=0
case "${1:-}" in
  "") ;;
  --for) seconds=${2:?"--for needs a number of seconds"} ;;
  *) echo "usage: sh examples/demo.sh [--for SECONDS]" >&2; exit 2 ;;
esac

sh deploy/setup.sh
echo "building (a few minutes the first time) ..."
AGREED_TARGET=agreed sh deploy/build.sh >/dev/null

mill=$(pwd)/examples/harrow-mill
rm -rf "$mill"
mkdir -p "$mill/drop/line1" "$mill/drop/line2"
pids=""
finish() {
  trap - EXIT INT TERM
  for pid in $pids; do kill "$pid" 2>/dev/null || true; done
  for pid in $pids; do wait "$pid" 2>/dev/null || true; done
}
trap finish EXIT
trap 'finish; exit 130' INT TERM

touch "$mill/told"
/usr/bin/python3 examples/receiver.py "$mill/receiver-port" "$mill/told" &
pids="$!"
while [ ! -s "$mill/receiver-port" ]; do sleep 0.1; done

(umask 077; head -c 24 /dev/urandom | base64 | sed 's/^/whsec_/' >"$mill/secret")
sed 's/port: 7480/port: 0/' examples/mill.yaml >"$mill/agreed.yaml"
cat >>"$mill/agreed.yaml" <<END

alerts:
  routes:
    - {name: demo, url: "http://127.0.0.1:$(cat "$mill/receiver-port")/agreed", secret_file: secret}
END

/usr/bin/python3 examples/feed.py "$mill" history
build/agreed run "$mill/agreed.yaml" >"$mill/out" 2>"$mill/log" &
service=$!
pids="$service $pids"
address=""
while [ -z "$address" ]; do
  sleep 0.1
  kill -0 "$service" 2>/dev/null || { cat "$mill/log" >&2; exit 1; }
  address=$(sed -n 's/.*\(http:[^ ]*\).*/\1/p' "$mill/out" | head -1)
done
sed -i "s/port: 0/port: ${address##*:}/" "$mill/agreed.yaml"  # started again, it answers at the same address
until [ "$(curl -s -o /dev/null -w '%{http_code}' "$address/health/ready")" = 200 ]; do sleep 0.1; done
ready_at=$(date +%s)

cat <<END

Harrow Mill is running; four weeks of history are in, and a shift goes by every two seconds. The newest result is twelve
days old, which the page says, until the feed has caught up with the clock.
In about 25 s line2's lamp begins to wear and its protein results drift upward.

  page      $address/
  status    curl -s $address/api/status
  try       drop a broken file:  echo nonsense > $mill/drop/line1/broken.csv
            kill it:             kill -9 $service   (and start it again: build/agreed run $mill/agreed.yaml)
  end       Ctrl-C

What the webhook receiver gets:
END
/usr/bin/python3 examples/feed.py "$mill" live &
pids="$! $pids"

if [ "$seconds" -eq 0 ]; then
  code=0
  wait "$service" || code=$?
  [ "$code" -eq 137 ] || exit "$code"
  echo "the service was killed; results go on being dropped, and the receiver waits for it to be started again"
  wait
fi
while [ $(($(date +%s) - ready_at)) -lt "$seconds" ]; do
  sleep 1
  kill -0 "$service" 2>/dev/null || { echo "the service ended by itself" >&2; cat "$mill/log" >&2; exit 1; }
done
curl -s "$address/api/status"
echo
finish
if grep -q '^agreed.alert.opened agreement_lost .*protein' "$mill/told" &&
   grep -q '^agreed.alert.opened check_standard_unstable .*line2' "$mill/told"; then
  echo "the drift of line2 was caught and told"
  exit 0
fi
echo "the drift of line2 was not told" >&2
exit 1
