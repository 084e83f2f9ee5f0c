"""For the test suite: a throw-away data folder, a fast hasher, no lock-out unless a test asks for it."""

import secrets
import tempfile
from pathlib import Path

from .base import *  # noqa: F403
from .base import DATABASES, SQLITE_OPTIONS, env

# tests/services.py names a folder and removes it; a bare `manage.py --settings` run gets one of its own.
WEIRBOOK_DATA = Path(env.str("WEIRBOOK_TEST_DATA", default="") or tempfile.mkdtemp(prefix="weirbook-test-"))
WEIRBOOK_FILES = WEIRBOOK_DATA / "files"
WEIRBOOK_ALLOW_NOW = True
WEIRBOOK_BACKUPS = WEIRBOOK_BACKUP_KEY_FILE = ""

SECRET_KEY = secrets.token_urlsafe(50)
ALLOWED_HOSTS = ["testserver", "localhost", "127.0.0.1"]

# Never DATABASE_URL: that may be somebody's records.
if url := env.str("WEIRBOOK_TEST_DATABASE_URL", default=""):
    DATABASES["default"] = {**env.db_url_config(url), "CONN_HEALTH_CHECKS": True}
else:
    DATABASES["default"] = {
        "ENGINE": "django.db.backends.sqlite3",
        "NAME": WEIRBOOK_DATA / "weirbook.sqlite3",
        # What the test database need not survive is a power cut.
        "OPTIONS": {
            **SQLITE_OPTIONS,
            "init_command": SQLITE_OPTIONS["init_command"].replace("synchronous=FULL", "synchronous=OFF"),
        },
        # A file, not memory: browser tests and worker processes open it beside the test.
        "TEST": {"NAME": str(WEIRBOOK_DATA / "test.sqlite3")},
    }
REDIS_URL = ""
CELERY_BROKER_URL = None

PASSWORD_HASHERS = ["django.contrib.auth.hashers.MD5PasswordHasher"]
AXES_ENABLED = False
# Tests set the clock; one that is about the end of a session asks for it.
WEIRBOOK_SESSION_HOURS = WEIRBOOK_SESSION_IDLE_HOURS = 1e9
EMAIL_BACKEND = "django.core.mail.backends.locmem.EmailBackend"
WHITENOISE_USE_FINDERS = True
WHITENOISE_AUTOREFRESH = True
