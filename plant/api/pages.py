"""The pages about the API for people: a works' devices and tokens, and what can be asked."""

from __future__ import annotations

import json
from typing import Any

from django.contrib import messages
from django.http import HttpRequest, HttpResponse
from django.shortcuts import get_object_or_404, redirect, render
from django.views.decorators.http import require_http_methods, require_POST, require_safe

from plant.api import actions, document, forms, queries
from plant.api.models import Token
from plant.api.scopes import SCOPES
from plant.works import access


@access.needs("people.change")
@require_http_methods(["GET", "HEAD", "POST"])
def tokens(request: HttpRequest, at: access.At) -> HttpResponse:
    """The devices of a works and their tokens; a new token is shown once."""
    form = forms.TokenForm(request.POST or None)
    if request.method == "POST" and form.is_valid():
        try:
            token, secret = actions.make(book=at.book, by=request.user, now=at.now, **form.cleaned_data)
        except actions.Refused as problem:
            form.add_error("name", str(problem))
        else:
            answer = render(request, "api/new_token.html", {"token": token, "secret": secret})
            answer["Cache-Control"] = "no-store"
            return answer
    shown = [(one, [SCOPES.get(scope, scope) for scope in one.scopes]) for one in queries.tokens(at.book)]
    return render(request, "api/tokens.html", {"form": form, "tokens": shown}, status=422 if form.errors else 200)


@require_POST
@access.needs("people.change")
def revoke(request: HttpRequest, at: access.At, token: int) -> HttpResponse:
    """A token is refused from now on."""
    found = get_object_or_404(Token, pk=token, book=at.book)
    try:
        actions.revoke(token=found, why=request.POST.get("reason", ""), by=request.user, now=at.now)
    except actions.Refused as problem:
        messages.error(request, str(problem))
    else:
        messages.success(request, f"{found.name} is refused from now on. What it has sent stays.")
    return redirect("api:tokens", at.code)


@require_safe
@access.anyone
def reference(request: HttpRequest) -> HttpResponse:
    """What can be asked, from the OpenAPI document."""
    context = {
        "paragraphs": _paragraphs(),
        "operations": list(_operations()),
        "fields": _fields("Reading"),
        "example": json.dumps(document.EXAMPLE, indent=1),
    }
    return render(request, "api/reference.html", context)


def _paragraphs() -> list[str]:
    text = document.DOCUMENT["info"]["description"].replace("`", "")
    return [" ".join(paragraph.split()) for paragraph in text.split("\n\n")]


def _operations() -> Any:
    for address, item in document.DOCUMENT["paths"].items():
        for method in ("get", "put"):
            if method in item:
                operation = item[method]
                yield {
                    "method": method.upper(),
                    "address": address,
                    "summary": operation["summary"],
                    "description": operation["description"],
                    "parameters": operation.get("parameters", []),
                    "answers": [(status, answer["description"]) for status, answer in operation["responses"].items()],
                }


def _fields(name: str) -> list[tuple[str, bool, str]]:
    schema = document.DOCUMENT["components"]["schemas"][name]
    return [(field, field in schema["required"], one["description"]) for field, one in schema["properties"].items()]
