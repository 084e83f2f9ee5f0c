"""Plain HTTP on the loopback address as in development, static files hashed and compressed as on a server."""

from deploy.settings.development import *  # noqa: F403
from deploy.settings.development import STORAGES, WEIRBOOK_DATA

STORAGES["staticfiles"] = {"BACKEND": "deploy.hashed.HashedFiles"}
STATIC_ROOT = WEIRBOOK_DATA / "static"
WHITENOISE_USE_FINDERS = False
