from django.urls import path

from plant.works import people_views, views

app_name = "works"
urlpatterns = [
    path("works/new/", views.new_works, name="new_works"),
    path("w/<slug:code>/settings/", views.settings, name="settings"),
    path("w/<slug:code>/settings/file/", views.file, name="file"),
    path("w/<slug:code>/settings/people/", people_views.everyone, name="people"),
    path("w/<slug:code>/settings/people/add/", people_views.add, name="add_person"),
    path("w/<slug:code>/settings/people/<str:username>/", people_views.person, name="person"),
    path("w/<slug:code>/settings/people/<str:username>/end/", people_views.end, name="end_membership"),
    path("w/<slug:code>/settings/people/<str:username>/password/", people_views.new_password, name="new_password"),
    path("w/<slug:code>/settings/<slug:kind>/", views.kind, name="kind"),
    path("w/<slug:code>/settings/<slug:kind>/new/", views.new, name="new"),
    path("w/<slug:code>/settings/<slug:kind>/<str:subject>/", views.subject, name="subject"),
    path("w/<slug:code>/settings/<slug:kind>/<str:subject>/change/", views.change, name="change"),
    path("w/<slug:code>/settings/<slug:kind>/<str:subject>/withdraw/", views.withdraw, name="withdraw"),
]
