"""The web application, for gunicorn: `deploy.wsgi:application`."""

import os

from django.core.wsgi import get_wsgi_application

os.environ.setdefault("DJANGO_SETTINGS_MODULE", "deploy.settings.production")

application = get_wsgi_application()
