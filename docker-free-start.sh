#!/usr/bin/env bash
# Starts Rimwright on this machine: database, payment and mail stand-ins, and the app. Ctrl-C or SIGTERM stops them all.
# Settings by environment: PORT, DATA_DIR, DATABASE_URL, DEMO (see README.md).
set -euo pipefail

here="$(cd "$(dirname "$(readlink -f "${BASH_SOURCE[0]}")")" && pwd)"

if ! command -v node >/dev/null 2>&1 || ! command -v npm >/dev/null 2>&1; then
  echo 'Rimwright needs Node 20 (20.19 or later) and npm. Install them, then run this again.' >&2
  exit 1
fi

# exec: the process that a caller signals is the supervisor itself.
exec node "$here/local/start.mjs" "$@"
