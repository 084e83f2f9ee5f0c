from django.apps import AppConfig


class SheetsConfig(AppConfig):
    name = "plant.sheets"
    label = "sheets"
