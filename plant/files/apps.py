from django.apps import AppConfig


class FilesConfig(AppConfig):
    name = "plant.files"
    label = "files"

    def ready(self) -> None:
        from plant.files import queries
        from plant.ledger import verify

        verify.register("files", queries.check)
