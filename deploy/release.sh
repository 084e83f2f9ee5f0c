#!/bin/sh
# Brings a server to the version that lies here: sh deploy/release.sh
#
# Run as the service's user with the environment of /etc/weirbook/env, after a back-up and before the services are
# restarted. Installs the locked packages, checks the settings, applies migrations, gathers static files.
set -eu
cd "$(dirname "$0")/.."
: "${DJANGO_SETTINGS_MODULE:?not set. First: set -a; . /etc/weirbook/env; set +a}"
"${PYTHON:-python3}" -B -m deploy.environment .venv requirements.txt
.venv/bin/python manage.py check --deploy --fail-level WARNING
.venv/bin/python manage.py migrate --noinput
.venv/bin/python manage.py collectstatic --noinput --verbosity 0
echo "Done. Now: systemctl restart 'weirbook-*'"
