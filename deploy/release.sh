#!/bin/sh
# Brings a server to the version that lies here: sh deploy/release.sh
#
# Run as the service's user with the environment of /etc/weirbook/env, after a back-up and before the services are
# restarted. Installs the locked packages, checks the settings, applies migrations, gathers static files.
#
# On PostgreSQL migrations need the owner of the tables, whose password is kept nowhere on the server: name the database as
# that role in WEIRBOOK_OWNER_URL, or type it when asked. Afterwards a superuser runs deploy/services/roles.sql.
set -eu
cd "$(dirname "$0")/.."
: "${DJANGO_SETTINGS_MODULE:?not set. First: set -a; . /etc/weirbook/env; set +a}"
"${PYTHON:-python3}" -B -m deploy.environment .venv requirements.txt
.venv/bin/python manage.py check --deploy --fail-level WARNING
owner=${WEIRBOOK_OWNER_URL:-}
case ${DATABASE_URL:-} in
postgres*)
    if [ -z "$owner" ] && [ -t 0 ]; then
        printf 'DATABASE_URL with the role weirbook_owner and its password (not shown): '
        trap 'stty echo' EXIT INT TERM
        stty -echo
        read -r owner
        stty echo
        echo
    fi
    ;;
esac
(
    if [ -n "$owner" ]; then export DATABASE_URL="$owner"; fi
    .venv/bin/python manage.py migrate --noinput
)
.venv/bin/python manage.py collectstatic --noinput --verbosity 0
case ${DATABASE_URL:-} in
postgres*) echo "Done. Now, as postgres: psql --dbname weirbook --file $PWD/deploy/services/roles.sql" ;;
*) echo "Done." ;;
esac
echo "Then: systemctl restart 'weirbook-*'"
