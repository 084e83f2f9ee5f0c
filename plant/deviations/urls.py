from django.urls import path

from plant.deviations import views

app_name = "deviations"
urlpatterns = [
    path("w/<slug:code>/deviations/", views.everything, name="list"),
    path("w/<slug:code>/deviations/try/", views.trial, name="try"),
    path("w/<slug:code>/deviations/<str:ref>/", views.one, name="one"),
    path("w/<slug:code>/deviations/<str:ref>/acknowledge/", views.acknowledge, name="acknowledge"),
    path("w/<slug:code>/deviations/<str:ref>/tell/", views.tell, name="tell"),
    path("w/<slug:code>/deviations/<str:ref>/act/", views.act, name="act"),
    path("w/<slug:code>/deviations/<str:ref>/verify/", views.verify, name="verify"),
    path("w/<slug:code>/deviations/<str:ref>/approve/", views.approve, name="approve"),
    path("w/<slug:code>/deviations/<str:ref>/close/", views.close, name="close"),
    path("w/<slug:code>/deviations/<str:ref>/comment/", views.comment, name="comment"),
]
