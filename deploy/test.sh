#!/bin/sh
# Everything: sh deploy/test.sh [pytest arguments]
#
# Installs what tests need, checks the code (deploy/check.sh), asks whether a package has a known weakness (deploy/audit.py;
# where that can't be asked it says so at the end), then runs the suite on SQLite, and on PostgreSQL everything that a
# database could answer differently (tests/operations starts both by itself). Needs no service and no rights: PostgreSQL
# and the Redis-protocol server come from wheels. As root a missing Chromium is fetched from Debian; elsewhere browser
# tests say that they were skipped. With CI=true such a skip is a failure.
set -eu
cd "$(dirname "$0")/.."
python=${PYTHON:-python3}
if ! "$python" -c 'import sys; sys.exit(sys.version_info < (3, 11))'; then
    echo "The tests need Python 3.11 or newer; $python is $("$python" -V 2>&1). Name one: PYTHON=python3.12" >&2
    exit 1
fi
"$python" -B -m deploy.environment .venv-test tests/requirements.txt

if ! command -v chromium >/dev/null 2>&1 && [ -z "${WEIRBOOK_CHROMIUM:-}" ] &&
    [ "$(id -u)" = 0 ] && command -v apt-get >/dev/null 2>&1; then
    echo "Fetching Chromium from Debian …"
    export DEBIAN_FRONTEND=noninteractive
    { apt-get -q update && apt-get -q install -y --no-install-recommends chromium; } >/dev/null 2>&1 ||
        echo "Chromium can't be had from Debian here." >&2
fi

failed=
stage() { # stage NAME COMMAND...
    name=$1
    shift
    echo "== $name"
    began=$(date +%s)
    status=0
    "$@" || status=$?
    # 5: the arguments given select no test of this stage
    if [ $status != 0 ] && [ $status != 5 ]; then failed="$failed $name;"; fi
    echo "== $name: $(($(date +%s) - began)) s"
}
pytest=".venv-test/bin/python -m pytest -q -n 2"

stage "checks" sh deploy/check.sh
audited=yes
audit() {
    status=0
    .venv-test/bin/python -B -m deploy.audit requirements.txt tests/requirements.txt || status=$?
    # 3: the service could not be asked. That is no failure of the code, and no success either: the last line says so.
    if [ $status = 3 ]; then audited=no status=0; fi
    return $status
}
stage "known weaknesses of packages" audit

stage "tests on SQLite" $pytest --database sqlite "$@"
stage "tests on PostgreSQL" $pytest --database postgres -m "not browser" --ignore tests/chemistry --ignore tests/operations "$@"

if [ -n "$failed" ]; then
    echo "Failed:$failed" >&2
    exit 1
fi
if [ $audited = no ]; then
    echo "Everything that could be tried passed. NOT TRIED: known weaknesses of packages (the service can't be asked here)."
    exit 0
fi
echo "Everything passed."
