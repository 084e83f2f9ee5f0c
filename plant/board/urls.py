from django.urls import path

from plant.board import views

app_name = "board"
urlpatterns = [
    path("", views.works, name="works"),
    path("help/", views.help_list, name="help"),
    path("help/<slug:slug>/", views.help_page, name="help_page"),
    path("w/<slug:code>/", views.board, name="board"),
    path("w/<slug:code>/now/", views.board_now, name="board_now"),
    path("w/<slug:code>/stock/", views.stock, name="stock"),
    path("w/<slug:code>/dosing/<str:point>/", views.dosing_point, name="dosing_point"),
    path("w/<slug:code>/readings/", views.readings_list, name="readings"),
    path("w/<slug:code>/trail/", views.trail, name="trail"),
]
