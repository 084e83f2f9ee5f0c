from django.apps import AppConfig


class ReportsConfig(AppConfig):
    name = "plant.reports"
    label = "reports"

    def ready(self) -> None:
        from plant.ledger import verify
        from plant.reports import queries

        verify.register("reports", queries.verify)
