from django.urls import path

from plant.api import pages, views

app_name = "api"
urlpatterns = [
    path("w/<slug:code>/devices/", pages.tokens, name="tokens"),
    path("w/<slug:code>/devices/<int:token>/revoke/", pages.revoke, name="revoke"),
    path("api/", pages.reference, name="reference"),
    path("api/openapi.json", views.described, name="document"),
    path("api/w/<slug:code>/", views.works, name="works"),
    path("api/w/<slug:code>/batches/<str:ident>", views.batch, name="batch"),
    path("api/w/<slug:code>/comparison", views.comparison, name="comparison"),
    path("api/w/<slug:code>/deviations", views.deviation_list, name="deviations"),
    path("api/w/<slug:code>/reports", views.report_list, name="reports"),
    path("api/w/<slug:code>/reports/<str:month>/<str:revision>", views.report, name="report"),
    path("api/w/<slug:code>/reports/<str:month>/<str:revision>/pdf", views.report_pdf, name="report_pdf"),
]
