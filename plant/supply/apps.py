from django.apps import AppConfig


class SupplyConfig(AppConfig):
    name = "plant.supply"
    label = "supply"
