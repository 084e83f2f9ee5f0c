import datetime as dt

from django.apps import AppConfig
from django.conf import settings


class DeployConfig(AppConfig):
    """Hangs what belongs to the machine (broker, back-up) onto the rooms that must not know of it."""

    name = "deploy"
    label = "deploy"

    def ready(self) -> None:
        from deploy import waking
        from deploy.backups import nightly
        from plant.jobs import registry

        registry.register(nightly.KIND, nightly.back_up, limit=registry.LONGEST_LIMIT, words="Back-up")
        registry.regularly("nightly back-up", every=dt.timedelta(minutes=30), ask=nightly.ask)
        if settings.REDIS_URL:
            registry.wake_by(waking.Waker().wake)
