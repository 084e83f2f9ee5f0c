#!/bin/sh
# What can be checked without running anything: sh deploy/check.sh
# Style, import contracts, types, missing migrations, and Django's own checks of the production settings.
# deploy/test.sh and pre-commit call this same command. Every check runs, so that one run shows everything.
set -eu
cd "$(dirname "$0")/.."
"${PYTHON:-python3}" -B -m deploy.environment .venv-test tests/requirements.txt
PATH="$PWD/.venv-test/bin:$PATH"
export PATH
unset DATABASE_URL REDIS_URL DJANGO_SETTINGS_MODULE || true
scratch=$(mktemp -d)
trap 'rm -rf "$scratch"' EXIT
WEIRBOOK_DATA=$scratch
export WEIRBOOK_DATA
failed=

check() { # check NAME COMMAND...
    name=$1
    shift
    if "$@" >"$scratch/output" 2>&1; then
        echo "ok      $name"
    else
        echo "FAILED  $name"
        sed 's/^/        /' "$scratch/output"
        failed="$failed $name;"
    fi
}

check "style" ruff check .
check "import contracts" lint-imports --no-cache
check "types" mypy
check "migrations" python manage.py makemigrations --check --dry-run
check "production settings" env \
    WEIRBOOK_SECRET_KEY="$(python -c 'import secrets; print(secrets.token_urlsafe(50))')" \
    WEIRBOOK_HOSTS=weirbook.example DJANGO_SETTINGS_MODULE=deploy.settings.production \
    python manage.py check --deploy --fail-level WARNING

if [ -n "$failed" ]; then
    echo "Failed:$failed" >&2
    exit 1
fi
