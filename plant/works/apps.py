from django.apps import AppConfig


class WorksConfig(AppConfig):
    name = "plant.works"
    label = "works"
