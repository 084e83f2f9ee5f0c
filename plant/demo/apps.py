from django.apps import AppConfig


class DemoConfig(AppConfig):
    name = "plant.demo"
    label = "demo"
