from django.apps import AppConfig


class JobsConfig(AppConfig):
    name = "plant.jobs"
    label = "jobs"
