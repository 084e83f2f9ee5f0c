import datetime as dt

from django.apps import AppConfig


class ReportsConfig(AppConfig):
    name = "plant.reports"
    label = "reports"

    def ready(self) -> None:
        from plant.jobs import registry
        from plant.ledger import verify
        from plant.reports import drafts, queries

        verify.register("reports", queries.verify)
        registry.register(drafts.KIND, drafts.make, words="draft of a monthly report")
        registry.regularly("drafts of monthly reports", every=dt.timedelta(minutes=30), ask=drafts.ask_night)
