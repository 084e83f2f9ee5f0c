from django.apps import AppConfig


class ReadingsConfig(AppConfig):
    name = "plant.readings"
    label = "readings"
