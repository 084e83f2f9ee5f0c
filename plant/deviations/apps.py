import datetime as dt

from django.apps import AppConfig


class DeviationsConfig(AppConfig):
    name = "plant.deviations"
    label = "deviations"

    def ready(self) -> None:
        from plant.deviations import tasks
        from plant.jobs import registry

        registry.register(tasks.CLOCK, tasks.by_the_clock)
        registry.register(tasks.NIGHT, tasks.by_night)
        registry.regularly("what time alone makes true", every=dt.timedelta(minutes=5), ask=tasks.ask_clock)
        registry.regularly("nightly review", every=dt.timedelta(minutes=30), ask=tasks.ask_night)
