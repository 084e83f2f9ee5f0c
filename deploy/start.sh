#!/bin/sh
# Weirbook on one machine: sh deploy/start.sh [--own | --once]
#
# Needs python3 (3.11 or newer) with venv, and the package registry at the first start; nothing else.
#   (nothing)  the demo works, made at the first start, served on http://127.0.0.1:8000/ (PORT)
#   --own      a database of your own, empty at first
#   --once     sets up, reviews the demo's last full month, issues its report, prints the PDF's path as the last line
set -eu
cd "$(dirname "$0")/.."
python=${PYTHON:-python3}

if ! command -v "$python" >/dev/null 2>&1; then
    echo "There is no $python here. On Debian and Ubuntu: apt install python3 python3-venv" >&2
    exit 1
fi
if ! "$python" -c 'import sys; sys.exit(sys.version_info < (3, 11))'; then
    echo "Weirbook needs Python 3.11 or newer; $python is $("$python" -V 2>&1)." >&2
    echo "Name another one: PYTHON=python3.12 sh deploy/start.sh" >&2
    exit 1
fi
exec "$python" -B -m deploy.start "$@"
