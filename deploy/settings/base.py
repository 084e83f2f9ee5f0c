"""What holds everywhere. Values come from the environment; nothing secret has a default."""

from datetime import timedelta
from pathlib import Path
from typing import Any

import environ

env = environ.Env()

BASE_DIR = Path(__file__).resolve().parents[2]

# Database file, documents and secrets of an embedded installation; production may point elsewhere.
WEIRBOOK_DATA = Path(env.str("WEIRBOOK_DATA", default=str(BASE_DIR / ".weirbook"))).resolve()
WEIRBOOK_FILES = WEIRBOOK_DATA / "files"

# A folder for nightly back-ups, best on another disk; without one none is made by itself. The key seals them.
WEIRBOOK_BACKUPS = env.str("WEIRBOOK_BACKUPS", default="")
WEIRBOOK_BACKUP_KEY_FILE = env.str("WEIRBOOK_BACKUP_KEY_FILE", default="")

# Whether `--now` may set the clock of a command, so that a history can be replayed. Never on a server.
WEIRBOOK_ALLOW_NOW = env.bool("WEIRBOOK_ALLOW_NOW", default=False)

DEBUG = False
ALLOWED_HOSTS: list[str] = []

# From the lowest floor to the doors; .importlinter holds the same order.
PLANT_APPS = [
    "plant.ledger",
    "plant.accounts",
    "plant.jobs",
    "plant.works",
    "plant.readings",
    "plant.stock",
    "plant.files",
    "plant.dosing",
    "plant.supply",
    "plant.deviations",
    "plant.notices",
    "plant.intake",
    "plant.board",
    "plant.sheets",
    "plant.reports",
    "plant.demo",
    "plant.api",
]


INSTALLED_APPS = [
    "django.contrib.contenttypes",
    "django.contrib.auth",
    "django.contrib.sessions",
    "django.contrib.messages",
    "django.contrib.staticfiles",
    "django_tables2",
    "csp",
    "axes",
    *PLANT_APPS,
    "deploy",
]

MIDDLEWARE = [
    "deploy.limits.RequestSize",
    "django.middleware.security.SecurityMiddleware",
    "whitenoise.middleware.WhiteNoiseMiddleware",
    "csp.middleware.CSPMiddleware",
    "django.contrib.sessions.middleware.SessionMiddleware",
    "django.middleware.common.CommonMiddleware",
    "django.middleware.csrf.CsrfViewMiddleware",
    "django.contrib.auth.middleware.AuthenticationMiddleware",
    "django.contrib.messages.middleware.MessageMiddleware",
    "plant.accounts.security_sessions.SessionLimits",
    "django.contrib.auth.middleware.LoginRequiredMiddleware",
    "django.middleware.clickjacking.XFrameOptionsMiddleware",
    "axes.middleware.AxesMiddleware",
]

ROOT_URLCONF = "deploy.urls"
WSGI_APPLICATION = "deploy.wsgi.application"

TEMPLATES = [
    {
        "BACKEND": "django.template.backends.django.DjangoTemplates",
        "DIRS": [BASE_DIR / "templates"],
        "APP_DIRS": False,
        "OPTIONS": {
            "loaders": [
                "django.template.loaders.filesystem.Loader",
                "django.template.loaders.app_directories.Loader",
            ],
            "context_processors": [
                "django.template.context_processors.request",
                "django.contrib.auth.context_processors.auth",
                "django.contrib.messages.context_processors.messages",
                "plant.reports.reminders.for_pages",
            ],
        },
    },
]

# Database ---------------------------------------------------------------------------------------------------

# A deferred transaction that reads and then writes fails at once when another writer is ahead, whatever the
# timeout: hence IMMEDIATE. FULL, because write-ahead logging with NORMAL may lose the last commits at a power
# cut.
SQLITE_OPTIONS: dict[str, Any] = {
    "transaction_mode": "IMMEDIATE",
    "timeout": 20,
    "init_command": (
        "PRAGMA journal_mode=WAL; PRAGMA synchronous=FULL; PRAGMA foreign_keys=ON; "
        "PRAGMA cache_size=-20000; PRAGMA journal_size_limit=67108864;"
    ),
}
DATABASES = {"default": env.db_url("DATABASE_URL", default=f"sqlite:///{WEIRBOOK_DATA / 'weirbook.sqlite3'}")}
if DATABASES["default"]["ENGINE"] == "django.db.backends.sqlite3":
    DATABASES["default"]["OPTIONS"] = SQLITE_OPTIONS
else:
    DATABASES["default"]["CONN_MAX_AGE"] = env.int("WEIRBOOK_CONN_MAX_AGE", default=60)
    DATABASES["default"]["CONN_HEALTH_CHECKS"] = True
DEFAULT_AUTO_FIELD = "django.db.models.BigAutoField"

# People -----------------------------------------------------------------------------------------------------

AUTH_USER_MODEL = "accounts.Person"
AUTHENTICATION_BACKENDS = [
    "axes.backends.AxesStandaloneBackend",
    "django.contrib.auth.backends.ModelBackend",
]
PASSWORD_HASHERS = [
    "django.contrib.auth.hashers.Argon2PasswordHasher",
    "django.contrib.auth.hashers.PBKDF2PasswordHasher",
]
AUTH_PASSWORD_VALIDATORS = [
    {"NAME": "django.contrib.auth.password_validation.UserAttributeSimilarityValidator"},
    {"NAME": "django.contrib.auth.password_validation.MinimumLengthValidator", "OPTIONS": {"min_length": 10}},
    {"NAME": "django.contrib.auth.password_validation.CommonPasswordValidator"},
    {"NAME": "django.contrib.auth.password_validation.NumericPasswordValidator"},
]
LOGIN_URL = "/sign-in/"
LOGIN_REDIRECT_URL = "/"
LOGOUT_REDIRECT_URL = LOGIN_URL

# One shift of twelve hours and its hand-over; and the longest a tablet lies unused between two rounds.
WEIRBOOK_SESSION_HOURS = env.float("WEIRBOOK_SESSION_HOURS", default=14)
WEIRBOOK_SESSION_IDLE_HOURS = env.float("WEIRBOOK_SESSION_IDLE_HOURS", default=5)
SESSION_COOKIE_AGE = int(WEIRBOOK_SESSION_HOURS * 3600)
SESSION_COOKIE_HTTPONLY = True
SESSION_COOKIE_SAMESITE = "Lax"
CSRF_COOKIE_SAMESITE = "Lax"

# Sign-in is slowed per name and address, so that a stranger cannot lock a whole works out by guessing one
# name.
AXES_FAILURE_LIMIT = 6
AXES_COOLOFF_TIME = timedelta(minutes=15)
AXES_LOCKOUT_PARAMETERS = [["username", "ip_address"]]
AXES_RESET_ON_SUCCESS = True
AXES_LOCKOUT_TEMPLATE = "accounts/locked.html"
AXES_VERBOSE = False

# Browser ----------------------------------------------------------------------------------------------------

CONTENT_SECURITY_POLICY = {
    "DIRECTIVES": {
        "default-src": ["'self'"],
        "object-src": ["'none'"],
        "base-uri": ["'self'"],
        "form-action": ["'self'"],
        "frame-ancestors": ["'none'"],
    },
}
X_FRAME_OPTIONS = "DENY"
SECURE_CONTENT_TYPE_NOSNIFF = True
SECURE_REFERRER_POLICY = "same-origin"
SECURE_CROSS_ORIGIN_OPENER_POLICY = "same-origin"

# Requests of one token in a minute, over all web nodes (plant.api).
WEIRBOOK_API_PER_MINUTE = env.int("WEIRBOOK_API_PER_MINUTE", default=120)

# A batch of 10,000 readings fits; anything larger comes as a file.
DATA_UPLOAD_MAX_MEMORY_SIZE = 10 * 1024 * 1024
DATA_UPLOAD_MAX_NUMBER_FIELDS = 5000
# The whole of a request; the sample proxies refuse the same. Pages that take files have smaller limits of their own.
WEIRBOOK_LARGEST_REQUEST = 30 * 1024 * 1024
DATA_UPLOAD_MAX_NUMBER_FILES = 10
FILE_UPLOAD_PERMISSIONS = 0o640

STATIC_URL = "/static/"
STATIC_ROOT = BASE_DIR / ".static"
STORAGES = {
    "default": {"BACKEND": "django.core.files.storage.FileSystemStorage"},
    "staticfiles": {"BACKEND": "django.contrib.staticfiles.storage.StaticFilesStorage"},
}

# Language and time ------------------------------------------------------------------------------------------

LANGUAGE_CODE = "en-gb"
USE_I18N = False
USE_TZ = True
TIME_ZONE = "UTC"

# Telling people ---------------------------------------------------------------------------------------------

# Without EMAIL_URL nobody is written to; the call list still stands on the board.
WEIRBOOK_MAIL = bool(env.str("EMAIL_URL", default=""))
vars().update(env.email_url("EMAIL_URL", default="consolemail://"))
EMAIL_TIMEOUT = 10
DEFAULT_FROM_EMAIL = env.str("WEIRBOOK_MAIL_FROM", default="weirbook@localhost")

# Work done later --------------------------------------------------------------------------------------------

# The job row in the database is the truth. With a broker a message wakes a worker; without one `manage.py
# work` polls the same rows, and nothing is ever sent.
REDIS_URL = env.str("REDIS_URL", default="")
CELERY_BROKER_URL = REDIS_URL or None
CELERY_TASK_IGNORE_RESULT = True
CELERY_TASK_ACKS_LATE = True
CELERY_TASK_REJECT_ON_WORKER_LOST = True
CELERY_WORKER_PREFETCH_MULTIPLIER = 1
# Each kind of job has its own, shorter limit (plant.jobs.registry); this one is for a process that hangs altogether.
CELERY_TASK_TIME_LIMIT = 32 * 60
CELERY_ACCEPT_CONTENT = ["json"]
CELERY_TASK_SERIALIZER = "json"
CELERY_TIMEZONE = "UTC"
CELERY_BROKER_CONNECTION_RETRY_ON_STARTUP = True
CELERY_BROKER_TRANSPORT_OPTIONS = {
    # Longer than the hard time limit, or a running task would be handed out a second time.
    "visibility_timeout": 3600,
    # The defaults look for messages of dead workers only every hundred seconds.
    "unacked_restore_interval": 5,
    "unacked_restore_throttle": 1,
    # A broker that accepts and never answers must not hold a request.
    "socket_connect_timeout": 2,
    "socket_timeout": 5,
}
CELERY_BEAT_SCHEDULE = {
    # A message that found no worker in time is worthless: the next one does the same.
    "work": {"task": "weirbook.work", "schedule": 5.0, "options": {"expires": 5}},
    "keep-schedule": {"task": "weirbook.keep_schedule", "schedule": 60.0, "options": {"expires": 60}},
}
CELERY_TASK_PUBLISH_RETRY_POLICY = {
    "max_retries": 1,
    "interval_start": 0,
    "interval_step": 0.1,
    "interval_max": 0.2,
}

LOGGING: dict[str, Any] = {
    "version": 1,
    "disable_existing_loggers": False,
    "formatters": {"line": {"format": "{asctime} {levelname} {name}: {message}", "style": "{"}},
    "handlers": {"console": {"class": "logging.StreamHandler", "formatter": "line"}},
    "root": {"handlers": ["console"], "level": "INFO"},
    # These lines carry the name somebody tried to sign in with.
    "loggers": {"axes": {"level": "ERROR"}},
}
