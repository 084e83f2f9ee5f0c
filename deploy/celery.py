"""The Celery application for workers and beat: `celery --app deploy.celery:app worker`.

Only with REDIS_URL. Tasks live in the apps as `shared_task`; the schedule is settings.CELERY_BEAT_SCHEDULE.
"""

import os

from celery import Celery

os.environ.setdefault("DJANGO_SETTINGS_MODULE", "deploy.settings.production")

app = Celery("weirbook")
app.config_from_object("django.conf:settings", namespace="CELERY")
app.autodiscover_tasks()
