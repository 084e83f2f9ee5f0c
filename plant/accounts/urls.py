from django.urls import path

from plant.accounts import security_views, views

app_name = "accounts"
urlpatterns = [
    path("sign-in/", views.sign_in, name="sign_in"),
    path("sign-in/code/", security_views.code, name="code"),
    path("second-factor/", security_views.second_factor, name="second_factor"),
    path("sign-out/", views.sign_out, name="sign_out"),
    path("password/", views.password, name="password"),
    path("theme/", views.theme, name="theme"),
]
