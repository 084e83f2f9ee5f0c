from django.urls import path

from plant.reports import views

app_name = "reports"
urlpatterns = [
    path("w/<slug:code>/reports/", views.months, name="months"),
    path("w/<slug:code>/reports/check/", views.check, name="check"),
    path("w/<slug:code>/reports/year/<int:year>.<str:kind>", views.year_file, name="year_file"),
    path("w/<slug:code>/reports/<str:month>/", views.month, name="month"),
    path("w/<slug:code>/reports/<str:month>/prepare/", views.prepare, name="prepare"),
    path("w/<slug:code>/reports/<str:month>/certify/", views.certify, name="certify"),
    path("w/<slug:code>/reports/<str:month>/draft/", views.draft_state, name="draft_state"),
    path("w/<slug:code>/reports/<str:month>/draft/ask/", views.ask_draft, name="ask_draft"),
    path("w/<slug:code>/reports/<str:month>/draft/night.pdf", views.kept_draft, name="kept_draft"),
    path("w/<slug:code>/reports/<str:month>/draft.<str:kind>", views.draft_file, name="draft_file"),
    path("w/<slug:code>/reports/<str:month>/revision-<int:revision>.<str:kind>", views.issued_file, name="issued_file"),
]
