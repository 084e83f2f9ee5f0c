from django.apps import AppConfig


class DosingConfig(AppConfig):
    name = "plant.dosing"
    label = "dosing"
