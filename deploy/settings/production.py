"""On a server: HTTPS behind a proxy, hosts and secret from the environment, hashed static files, JSON logs.

deploy/services/env.sample lists every variable.
"""

from .base import *  # noqa: F403
from .base import LOGGING, STORAGES, WEIRBOOK_DATA, env

SECRET_KEY = env.str("WEIRBOOK_SECRET_KEY")
SECRET_KEY_FALLBACKS = env.list("WEIRBOOK_OLD_SECRET_KEYS", default=[])
ALLOWED_HOSTS = env.list("WEIRBOOK_HOSTS")
CSRF_TRUSTED_ORIGINS = [f"https://{host}" for host in ALLOWED_HOSTS]
WEIRBOOK_ALLOW_NOW = False
WEIRBOOK_BACKUPS = env.str("WEIRBOOK_BACKUPS", default=str(WEIRBOOK_DATA / "backups"))

# The proxy of deploy/services sets this header itself and drops one sent by a browser.
SECURE_PROXY_SSL_HEADER = ("HTTP_X_FORWARDED_PROTO", "https")
SECURE_SSL_REDIRECT = True
# The proxy and the service manager ask over plain HTTP on the loopback address.
SECURE_REDIRECT_EXEMPT = [r"^healthz$", r"^readyz$"]
SECURE_HSTS_SECONDS = env.int("WEIRBOOK_HSTS_SECONDS", default=365 * 24 * 3600)
SECURE_HSTS_INCLUDE_SUBDOMAINS = True
SECURE_HSTS_PRELOAD = True
SESSION_COOKIE_SECURE = True
CSRF_COOKIE_SECURE = True
AXES_CLIENT_IP_CALLABLE = "deploy.proxy.client_address"

STATIC_ROOT = env.path("WEIRBOOK_STATIC", default=str(WEIRBOOK_DATA / "static"))()
STORAGES["staticfiles"] = {"BACKEND": "deploy.hashed.HashedFiles"}

LOGGING["formatters"]["json"] = {"()": "deploy.logs.JsonLine"}
LOGGING["handlers"]["console"]["formatter"] = "json"
