"""The page of work done later. It stands here, since the jobs know no works and the works know no jobs."""

from django.contrib import messages
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.urls import path
from django.views.decorators.http import require_POST, require_safe

from plant.jobs import actions, queries
from plant.works import access


def _sees_site(at: access.At) -> bool:
    # Work of no works (back-up) is shown to those who answer for the whole: its errors speak of the machine.
    return at.member.may("people.change")


@require_safe
@access.needs("jobs.see")
def page(request: HttpRequest, at: access.At) -> HttpResponse:
    """What waits, runs, has failed or is done, and whether any worker is at work."""
    kept_at = queries.schedule_last_kept()
    context = {
        "at": at,
        "jobs": queries.of_book(at.book, now=at.now, with_site=_sees_site(at)),
        "kept_at": kept_at,
        "asleep": kept_at is None or at.now - kept_at > queries.ASLEEP_AFTER,
        "zone": at.stated.calendar(at.now).zone,
    }
    return render(request, "jobs/jobs.html", context)


@require_POST
@access.needs("jobs.see")
def again(request: HttpRequest, at: access.At, pk: int) -> HttpResponse:
    """Runs a failed job again."""
    job = queries.one(at.book, pk, with_site=_sees_site(at))
    if job is None:
        raise Http404("There is no such job at this works.")
    try:
        actions.run_again(job=job, by=request.user, now=at.now)
    except actions.CannotRunAgain as problem:
        messages.warning(request, str(problem))
    else:
        messages.success(request, "It waits for the next free worker.")
    return redirect("jobs:page", at.code)


app_name = "jobs"
urlpatterns = [
    path("w/<slug:code>/jobs/", page, name="page"),
    path("w/<slug:code>/jobs/<int:pk>/again/", again, name="again"),
]
