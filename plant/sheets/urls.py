from django.urls import path

from plant.sheets import views

app_name = "sheets"
urlpatterns = [
    path("w/<slug:code>/sheets/", views.index, name="index"),
    path("w/<slug:code>/sheets/checked/", views.checked, name="checked"),
    path("w/<slug:code>/sheets/<slug:slug>/", views.sheet, name="sheet"),
]
