#!/bin/sh
# The unit file is right, and as closed as the documentation says. Argument: the executable.
set -eu
cd "$(dirname "$0")/../.."
unit=deploy/systemd/agreed.service
most=1.5   # 0 best, 10 worst; deploy/installation.md names the figure

folder=$(mktemp -d)
trap 'rm -rf "$folder"' EXIT
sed "s#/usr/bin/agreed#$1#" "$unit" >"$folder/agreed.service"
# A fault is a word on the error output; the exit status alone is 0 for unknown keys.
said=$(systemd-analyze verify --man=no "$folder/agreed.service" 2>&1) || { echo "$said"; exit 1; }
if printf '%s' "$said" | grep -q 'agreed\.service'; then echo "$said"; exit 1; fi

systemd-analyze security --offline=true --no-pager --threshold="$(echo "$most" | awk '{print int($1 * 10)}')" "$unit" \
  >"$folder/security" || { cat "$folder/security"; exit 1; }
figure=$(sed -n 's/.*exposure level for agreed.service: \([0-9.]*\).*/\1/p' "$folder/security")
grep -qF "gives $figure (" deploy/installation.md || { echo "deploy/installation.md gives another figure than $figure"; exit 1; }
echo "exposure $figure, at most $most"
