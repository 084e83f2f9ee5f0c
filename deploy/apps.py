from django.apps import AppConfig
from django.conf import settings


class DeployConfig(AppConfig):
    """Hangs what belongs to the machine (broker, back-up) onto the rooms that must not know of it."""

    name = "deploy"
    label = "deploy"

    def ready(self) -> None:
        from deploy import waking
        from plant.jobs import registry

        if settings.REDIS_URL:
            registry.wake_by(waking.Waker().wake)
