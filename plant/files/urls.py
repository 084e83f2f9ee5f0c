from django.urls import path

from plant.files import views

app_name = "files"

urlpatterns = [
    path("w/<slug:code>/documents/<str:ref>/", views.document, name="document"),
]
