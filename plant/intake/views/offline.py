"""What a browser asks for to keep the round at hand without a network. None of it holds data, none of it needs a sign-in."""

from __future__ import annotations

import re

from django.contrib.auth.decorators import login_not_required
from django.http import HttpRequest, HttpResponse, JsonResponse
from django.shortcuts import render
from django.templatetags.static import static
from django.views.decorators.http import require_safe

from plant.intake import offline

_CODE = re.compile(r"[-\w]{1,24}")


@login_not_required
@require_safe
def worker(request: HttpRequest) -> HttpResponse:
    """The service worker, at the root so that it may stand before every page."""
    return HttpResponse(offline.worker(), content_type="text/javascript", headers={"Cache-Control": "no-cache"})


@login_not_required
@require_safe
def shell(request: HttpRequest) -> HttpResponse:
    """The round's page without its data; script fills it from the browser's own database."""
    return render(request, "intake/round_shell.html")


@login_not_required
@require_safe
def manifest(request: HttpRequest) -> HttpResponse:
    """What the installed app is called and where it opens."""
    code = request.GET.get("works", "")
    start = f"/w/{code}/round/" if _CODE.fullmatch(code) else "/"
    answer = JsonResponse(
        {
            "id": start,
            "name": f"Weirbook {code}".strip() if start != "/" else "Weirbook",
            "short_name": "Weirbook",
            "start_url": start,
            "scope": "/",
            "display": "standalone",
            "background_color": "#F5F7F6",
            "theme_color": "#0A5A86",
            "icons": [
                {"src": static("board/icon.svg"), "sizes": "any", "type": "image/svg+xml", "purpose": "any"},
                *(
                    {"src": static(f"board/icon-{size}.png"), "sizes": f"{size}x{size}", "type": "image/png", "purpose": "any"}
                    for size in (192, 512)
                ),
            ],
        }
    )
    answer["Content-Type"] = "application/manifest+json"
    return answer


for _view in (worker, shell, manifest):
    _view.permission = "public"  # type: ignore[attr-defined]  # read by the walk over all addresses
