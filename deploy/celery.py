"""The Celery application for workers and beat: `celery --app deploy.celery:app worker`.

Only with REDIS_URL. Its tasks are those of deploy/tasks.py, its schedule is settings.CELERY_BEAT_SCHEDULE.
"""

import os

from celery import Celery

os.environ.setdefault("DJANGO_SETTINGS_MODULE", "deploy.settings.production")

app = Celery("weirbook", include=["deploy.tasks"])
app.config_from_object("django.conf:settings", namespace="CELERY")
