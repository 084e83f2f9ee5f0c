"""The least that Django can serve: one page without middleware, session or database. The measure for serving.py."""

from django.conf import settings
from django.core.wsgi import get_wsgi_application
from django.http import HttpRequest, HttpResponse
from django.urls import path

settings.configure(SECRET_KEY="bare", ALLOWED_HOSTS=["127.0.0.1"], ROOT_URLCONF=__name__, MIDDLEWARE=[])


def page(request: HttpRequest) -> HttpResponse:
    return HttpResponse("bare\n", content_type="text/plain")


urlpatterns = [path("", page)]
application = get_wsgi_application()
