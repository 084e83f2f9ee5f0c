from django.apps import AppConfig


class BoardConfig(AppConfig):
    name = "plant.board"
    label = "board"
