"""What still hinders the issue of a month, each with its place. Some of it must be mended; the rest is mended or explained."""

from __future__ import annotations

from dataclasses import dataclass

from plant.deviations import tasks
from plant.jobs.models import Job
from plant.reports.month import Month
from plant.reports.parts import deviations, expected, values
from plant.works import access


@dataclass(frozen=True)
class Hindrance:
    """One thing. ``must`` can't be explained away. ``href`` is where it is mended, "" where that is this page."""

    key: str
    words: str
    href: str = ""
    must: bool = False


def of(month: Month) -> list[Hindrance]:
    """Everything that hinders, what must be mended first."""
    found = [*_must(month), *_doubtful(month), *_deviations(month), *_doses(month), *_missing(month), *_waiting(month)]
    return sorted(found, key=lambda item: not item.must)


def _url(month: Month, tail: str) -> str:
    return f"/w/{month.book.code}/{tail}"


def _must(month: Month) -> list[Hindrance]:
    out = []
    if not month.over:
        out.append(
            Hindrance(
                "not-over", f"The month runs until {month.local(month.end)}; until then there is only a draft.", must=True
            )
        )
    members = [access.member_from(name, value) for name, value in month.stated.in_force("membership", month.now)]
    if not any(member is not None and member.may("report.sign_certified") for member in members):
        out.append(
            Hindrance(
                "nobody-certifies", "Nobody has the right to certify here: state it first.", _url(month, "settings/"), must=True
            )
        )
    return out


def _doubtful(month: Month) -> list[Hindrance]:
    out = []
    for (site, parameter), points in month.series.items():
        doubtful = [point for point in points if point.doubtful]
        if doubtful:
            label, _, _ = values.printed(month, parameter)
            days = ", ".join(dict.fromkeys(month.day_words(month.calendar.day_of(point.at)) for point in doubtful))
            out.append(
                Hindrance(
                    f"doubtful:{site}:{parameter}",
                    f"{site} {values.in_sentence(label)}: {_count(len(doubtful), 'doubtful reading')} not settled ({days})",
                    _url(month, f"reading/{doubtful[0].ref}/"),
                )
            )
    return out


def _deviations(month: Month) -> list[Hindrance]:
    out = []
    for view in deviations.views(month):
        if view.state in ("closed", "corrected_away"):
            continue
        owed = "; somebody is still to be told" if view.tellings_owed else ""
        what = " ".join(part.replace("_", " ") for part in (view.subject, view.parameter) if part)
        out.append(
            Hindrance(
                f"deviation:{view.ref}",
                f"{view.level.capitalize()} deviation of {month.day_words(view.raised_for)} is "
                f"{view.state.replace('_', ' ')}: {what}, {view.value}{owed}",
                _url(month, f"deviations/{view.ref}/"),
            )
        )
    return out


def _doses(month: Month) -> list[Hindrance]:
    unknown: dict[str, list[str]] = {}
    for row in month.doses:
        if row.expected and row.used_mg_l.value is None and month.calendar.bounds(row.day)[1] <= month.now:
            unknown.setdefault(row.dosing_point, []).append(month.day_words(row.day))
    return [
        Hindrance(
            f"dose:{code}",
            f"{code}: the dose of {_count(len(days), 'day')} is not known ({_some(days)})",
            _url(month, f"dosing/{code}/"),
        )
        for code, days in unknown.items()
    ]


def _missing(month: Month) -> list[Hindrance]:
    out = []
    for line in expected.lines(month):
        if line.missing:
            label, _, _ = values.printed(month, line.parameter)
            out.append(
                Hindrance(
                    f"missing:{line.site}:{line.parameter}",
                    f"{line.site} {values.in_sentence(label)}: {line.missing} of {line.slots} values due are not on record",
                    _url(month, "round/"),
                )
            )
    return out


def _waiting(month: Month) -> list[Hindrance]:
    """Records whose days have not been judged yet. What the schedule asks for again and again does not count."""
    waiting = Job.objects.filter(book=month.book, state__in=(Job.State.QUEUED, Job.State.RUNNING), kind__contains="judge")
    count = waiting.exclude(kind__in=(tasks.CLOCK, tasks.NIGHT)).count()
    return [Hindrance("waiting", f"{_count(count, 'judgement')} of new records still to be done")] if count else []


def _count(number: int, what: str) -> str:
    return f"{number} {what}{'' if number == 1 else 's'}"


def _some(days: list[str]) -> str:
    return ", ".join(days[:6]) + (f" and {len(days) - 6} more" if len(days) > 6 else "")
