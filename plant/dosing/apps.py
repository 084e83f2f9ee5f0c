from django.apps import AppConfig


class DosingConfig(AppConfig):
    name = "plant.dosing"
    label = "dosing"

    def ready(self) -> None:
        from plant.dosing import rebuild
        from plant.ledger import verify

        verify.register("dosing", rebuild.check)
