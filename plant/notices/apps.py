import datetime as dt

from django.apps import AppConfig


class NoticesConfig(AppConfig):
    name = "plant.notices"
    label = "notices"

    def ready(self) -> None:
        from plant.jobs import registry
        from plant.notices import mailing

        registry.register(mailing.SEND, mailing.send, words="mail about a deviation")
        registry.regularly("mail about deviations", every=dt.timedelta(minutes=1), ask=mailing.look)
