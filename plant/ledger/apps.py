from django.apps import AppConfig
from django.db.models.signals import post_migrate


class LedgerConfig(AppConfig):
    name = "plant.ledger"
    label = "ledger"

    def ready(self) -> None:
        from plant.ledger import locks

        # SQLite drops triggers when a migration rebuilds a table, so every migrate ends by putting them back.
        post_migrate.connect(locks.after_migrate, dispatch_uid="ledger-locks")
