from django.apps import AppConfig


class StockConfig(AppConfig):
    name = "plant.stock"
    label = "stock"
