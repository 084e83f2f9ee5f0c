"""On one's own machine: plain HTTP on the loopback address, SQLite in a dot-folder, no hashed static files.

`deploy/start.sh` runs the demo and a small works with these settings; a server that others reach uses
production.
"""

import secrets

from .base import *  # noqa: F403
from .base import WEIRBOOK_DATA, env

DEBUG = env.bool("WEIRBOOK_DEBUG", default=False)
ALLOWED_HOSTS = env.list("WEIRBOOK_HOSTS", default=["localhost", "127.0.0.1", "[::1]"])

_key_file = WEIRBOOK_DATA / "secret_key"
# Without the file that deploy/start.sh makes, each process has a key of its own and sign-ins end with it.
SECRET_KEY = _key_file.read_text().strip() if _key_file.exists() else secrets.token_urlsafe(50)

WHITENOISE_USE_FINDERS = True
WEIRBOOK_DATA.mkdir(mode=0o700, parents=True, exist_ok=True)
