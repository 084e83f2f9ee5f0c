"""The board's pages: they read, and change nothing."""

from __future__ import annotations

import datetime as dt
from typing import Any

from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render
from django.utils.safestring import SafeString, mark_safe
from django.views.decorators.http import require_safe
from django_tables2 import RequestConfig

from plant import clock, scene
from plant.board import dosing_point as one_point
from plant.board import exports, forms, guide, pictures, queries, rows, shown, store, tables, trails
from plant.dosing import queries as dosing
from plant.readings import queries as readings
from plant.scene import svg
from plant.supply import queries as supply
from plant.works import access, parameters
from plant.works.stated import NotStated

RUN_DAYS = 90
WEEK = dt.timedelta(days=6)


def painted(picture: scene.Scene | None, ident: str) -> SafeString:
    """A picture as markup."""
    return mark_safe(svg.paint(picture, ident)) if picture else SafeString("")


@require_safe
def works(request: HttpRequest) -> HttpResponse:
    """The works of the person who asks, each with its sentence, worst first."""
    now = clock.now()
    username = request.user.get_username()
    found = queries.of_person(access.works_of(username, now), username, now)
    return render(request, "board/works.html", {"works": found})


works.permission = "anyone"  # type: ignore[attr-defined]


def _board_context(at: access.At) -> dict[str, Any]:
    return {"at": at, "board": queries.board(at)}


@require_safe
@access.needs("see")
def board(request: HttpRequest, at: access.At) -> HttpResponse:
    """Is anything wrong?"""
    return render(request, "board/board.html", _board_context(at))


@require_safe
@access.needs("see")
def board_now(request: HttpRequest, at: access.At) -> HttpResponse:
    """What of the board changes, for the page that is open to fetch again."""
    return render(request, "board/board_now.html", _board_context(at))


@require_safe
@access.needs("see")
def stock(request: HttpRequest, at: access.At) -> HttpResponse:
    """The columns of the store, what to order, and the table."""
    stated, now = at.stated, at.now
    if not stated.vessels(now):
        return render(request, "board/stock.html", {"at": at, "store": None})
    calendar = stated.calendar(now)
    products = supply.supply(at.book, now, stated=stated)
    found = supply.by_vessel(products)
    wanted = request.GET.get("export", "")
    if wanted in exports.FORMATS:
        return exports.answer(wanted, f"{at.code}-stock", rows.STOCK_HEADER, rows.stock_export(found))
    page = store.store(stated, products, found, now=now, calendar=calendar)
    table = tables.StockTable(rows.stock(found, works=stated.works(now), names=queries.names(stated, now)))
    RequestConfig(request, paginate=False).configure(table)
    columns = [(column, painted(column.picture, f"column-{column.code}")) for column in page.columns]
    context = {
        "at": at,
        "store": page,
        "columns": columns,
        "table": table,
        "window": painted(page.windows, "window"),
        "window_narrow": painted(page.windows_narrow, "window-narrow"),
    }
    return render(request, "board/stock.html", context)


@require_safe
@access.needs("see")
def dosing_point(request: HttpRequest, at: access.At, point: str) -> HttpResponse:
    """Today's three answers large, ninety days as a run, the table, and what happened."""
    stated, now = at.stated, at.now
    try:
        described = stated.dosing_point(point, now)
    except NotStated:
        raise Http404("There is no such dosing point.") from None
    calendar = stated.calendar(now)
    last = _asked_day(request, calendar.day_of(now) - dt.timedelta(days=1))
    every = dosing.comparison(at.book, last - dt.timedelta(days=RUN_DAYS - 1), last, stated=stated)
    found = [row for row in every if row.dosing_point == point]
    if not found:
        raise Http404("This dosing point was not stated in those days.")
    wanted = request.GET.get("export", "")
    if wanted in exports.FORMATS:
        return exports.answer(wanted, f"{at.code}-{point}-{last}", rows.DOSE_HEADER, rows.dose_export(found))
    return render(request, "board/dosing_point.html", _dosing_context(request, at, described, found, calendar))


def _dosing_context(
    request: HttpRequest, at: access.At, point: Any, found: list[Any], calendar: clock.Calendar
) -> dict[str, Any]:
    now, stated = at.now, at.stated
    operator = at.member.role == "operator"
    tolerance = pictures.tolerance_pct(stated, point.code, now)
    happened = one_point.events(at.book, stated, point, found, now=now, calendar=calendar, code=at.code)
    flags = one_point.flags(happened, calendar, "#events")
    levels = one_point.levels_by_day(at.book, point.code, found)
    every_day = rows.said_every_day(found)
    table = tables.DoseTable(
        rows.doses(
            reversed(found),
            works=stated.works(now),
            now=now,
            calendar=calendar,
            code=at.code,
            spread=not operator,
            leave_out=every_day,
        )
    )
    RequestConfig(request, paginate={"per_page": 31}).configure(table)

    def strip(width: float) -> SafeString:
        picture = pictures.day_strip(
            found[-1], name=point.name, code=at.code, tolerance=tolerance, whisker=not operator, width=width
        )
        return painted(picture, f"strip-{width:.0f}")

    def line(width: float, height: float) -> tuple[scene.Scene, SafeString]:
        picture = pictures.dose_run(
            found,
            name=point.name,
            calendar=calendar,
            tolerance=tolerance,
            flags=flags,
            levels=levels,
            width=width,
            height=height,
        )
        return picture, painted(picture, f"run-{width:.0f}")

    wide, wide_markup = line(1140, 320)
    return {
        "at": at,
        "point": point,
        "row": found[-1],
        "state": stated.state("dosing_point", point.code, now),
        "product": stated.product(point.product, now),
        "answers": one_point.answers(found[-1]),
        "basis": shown.formula(found[-1].dose_basis),
        "day": shown.day(found[-1].day, now, calendar),
        "before": found[-1].day - dt.timedelta(days=1),
        "after": found[-1].day + dt.timedelta(days=1) if found[-1].day < calendar.day_of(now) - dt.timedelta(days=1) else None,
        "strip": strip(720),
        "strip_narrow": strip(340),
        "run": wide_markup,
        "run_narrow": line(420, 300)[1],
        "summary": wide.summary,
        "tolerance": tolerance,
        "events": happened,
        "every_day": every_day,
        "table": table,
    }


def _asked_day(request: HttpRequest, default: dt.date) -> dt.date:
    """The day in the address, where it is one and not later than the default."""
    try:
        return min(dt.date.fromisoformat(request.GET.get("day", "")), default)
    except ValueError:
        return default


@require_safe
@access.needs("see")
def readings_list(request: HttpRequest, at: access.At) -> HttpResponse:
    """Readings of a span of operating days, newest first, by site and parameter; CSV and XLSX."""
    stated, now = at.stated, at.now
    calendar = stated.calendar(now)
    today = calendar.day_of(now)
    asked = request.GET.copy()
    asked.setdefault("first", (today - WEEK).isoformat())
    asked.setdefault("last", today.isoformat())
    form = forms.ReadingsFilter(asked, stated=stated, now=now)
    found: list[readings.Point] = []
    if form.is_valid():
        wanted = form.cleaned_data
        start, end = calendar.span(wanted["first"], wanted["last"])
        found = readings.points(
            at.book,
            start=start,
            end=end,
            sites=[wanted["site"]] if wanted["site"] else None,
            parameters=[wanted["parameter"]] if wanted["parameter"] else None,
        )[::-1]
        kind = request.GET.get("export", "")
        if kind in exports.FORMATS:
            name = f"{at.code}-readings-{wanted['first']}-{wanted['last']}"
            return exports.answer(kind, name, rows.READING_HEADER, rows.reading_export(reversed(found), calendar))
    table = tables.ReadingTable(
        rows.readings(
            found,
            works=stated.works(now),
            known=parameters.known(stated, now),
            names=queries.names(stated, now),
            now=now,
            calendar=calendar,
            code=at.code,
        ),
        empty_text="No reading in these days fits what is asked for.",
    )
    RequestConfig(request, paginate={"per_page": 50}).configure(table)
    context = {"at": at, "form": form, "table": table, "count": shown.count(len(found), "reading")}
    return render(request, "board/readings.html", context)


@require_safe
@access.needs("see")
def trail(request: HttpRequest, at: access.At) -> HttpResponse:
    """What stands behind a figure: a page, or its inner part for the panel (asked with ``panel=1``)."""
    try:
        found = dosing.trail(at.book, request.GET.get("key", ""))
    except dosing.NoSuchFigure:
        raise Http404("There is no such figure at this works.") from None
    context = {"at": at, "trail": trails.opened(at, found), "spread": at.member.role != "operator"}
    template = "board/trail_panel.html" if request.GET.get("panel") else "board/trail.html"
    return render(request, template, context)


@require_safe
def help_list(request: HttpRequest) -> HttpResponse:
    """All pages of the help."""
    return render(request, "help/index.html", {"groups": guide.GROUPS})


@require_safe
def help_page(request: HttpRequest, slug: str) -> HttpResponse:
    """One page of the help."""
    topic = guide.TOPICS.get(slug)
    if topic is None:
        raise Http404("There is no such page in the help.")
    return render(request, f"help/{topic.slug}.html", {"topic": topic, "groups": guide.GROUPS})


help_list.permission = "anyone"  # type: ignore[attr-defined]
help_page.permission = "anyone"  # type: ignore[attr-defined]
