from django.apps import AppConfig


class AccountsConfig(AppConfig):
    name = "plant.accounts"
    label = "accounts"
