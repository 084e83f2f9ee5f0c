"""Whose request it is, behind a proxy."""

from django.http import HttpRequest


def client_address(request: HttpRequest) -> str:
    """The address the proxy saw: the last one in X-Forwarded-For, which the proxy itself has written.

    Earlier ones come from the browser and may say anything. Without the header, the peer's own address.
    """
    forwarded = request.META.get("HTTP_X_FORWARDED_FOR", "")
    return forwarded.rsplit(",", 1)[-1].strip() or request.META["REMOTE_ADDR"]
