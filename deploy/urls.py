"""Every address of the site. Each app knows its own paths; this file only puts them side by side."""

import importlib.util

from django.conf import settings
from django.urls import include, path

from deploy import health

urlpatterns = [
    path("healthz", health.alive, name="alive"),
    path("readyz", health.ready, name="ready"),
    path("", include("deploy.jobs_page")),
    *(path("", include(f"{app}.urls")) for app in settings.PLANT_APPS if importlib.util.find_spec(f"{app}.urls") is not None),
]

handler404 = "deploy.errors.missing"
handler500 = "deploy.errors.broken"
