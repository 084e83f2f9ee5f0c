import datetime as dt

from django.apps import AppConfig


class DosingConfig(AppConfig):
    name = "plant.dosing"
    label = "dosing"

    def ready(self) -> None:
        from plant.dosing import rebuild, tasks
        from plant.jobs import registry
        from plant.ledger import verify

        verify.register("dosing", rebuild.check)
        registry.register(tasks.KEEP, tasks.keep, words="days reckoned ahead")
        registry.regularly("days reckoned ahead", every=dt.timedelta(hours=1), ask=tasks.ask)
