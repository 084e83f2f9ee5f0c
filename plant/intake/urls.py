from django.urls import path

from plant.intake.views import delivering, entry, importing, late, offline, ordering, photo, reading, round_page

app_name = "intake"
urlpatterns = [
    path("w/<slug:code>/round/", round_page.page, name="round"),
    path("w/<slug:code>/round/late/", late.page, name="late"),
    path("w/<slug:code>/round/data/", round_page.data, name="round_data"),
    path("sw.js", offline.worker, name="worker"),
    path("app.webmanifest", offline.manifest, name="manifest"),
    path("round-shell/", offline.shell, name="shell"),
    path("w/<slug:code>/entries/<str:client_id>", entry.put, name="entry"),
    path("w/<slug:code>/photos/<str:client_id>", photo.put, name="photo"),
    path("w/<slug:code>/reading/<str:ref>/", reading.page, name="reading"),
    path("w/<slug:code>/delivery/", delivering.delivery, name="delivery"),
    path("w/<slug:code>/transfer/", delivering.transfer, name="transfer"),
    path("w/<slug:code>/orders/", ordering.orders, name="orders"),
    path("w/<slug:code>/orders/place/", ordering.place, name="place_order"),
    path("w/<slug:code>/orders/<str:ref>/cancel/", ordering.cancel, name="cancel_order"),
    path("w/<slug:code>/movement/<str:kind>/<str:ref>/reverse/", delivering.reverse, name="reverse"),
    path("w/<slug:code>/import/", importing.page, name="import"),
]
