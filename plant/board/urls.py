from django.urls import path

from plant.board import views

app_name = "board"
urlpatterns = [
    path("", views.works, name="works"),
]
