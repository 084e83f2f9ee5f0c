import datetime as dt

from django.apps import AppConfig


class JobsConfig(AppConfig):
    name = "plant.jobs"
    label = "jobs"

    def ready(self) -> None:
        from plant.jobs import actions, registry

        registry.regularly("clear out old jobs", every=dt.timedelta(hours=6), ask=actions.clear_out)
