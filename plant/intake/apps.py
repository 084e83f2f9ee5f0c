from django.apps import AppConfig


class IntakeConfig(AppConfig):
    name = "plant.intake"
    label = "intake"

    def ready(self) -> None:
        from plant.intake import judging
        from plant.jobs import registry

        registry.register(judging.JOB, judging.run, words="judging the days of an entry")
