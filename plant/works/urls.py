from django.urls import path

from plant.works import people_views, views
from plant.works.tablets import views as tablet_views

app_name = "works"
urlpatterns = [
    path("works/new/", views.new_works, name="new_works"),
    path("w/<slug:code>/tablets/", tablet_views.tablets, name="tablets"),
    path("w/<slug:code>/tablets/<int:device>/revoke/", tablet_views.revoke, name="revoke_tablet"),
    path("w/<slug:code>/tablets/pin/<str:username>/", tablet_views.new_pin, name="new_pin"),
    path("w/<slug:code>/pin/", tablet_views.own_pin, name="own_pin"),
    path("w/<slug:code>/spells/<str:ident>", tablet_views.spell, name="spell"),
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
