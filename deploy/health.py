"""Two pages for a proxy, a service manager and monitoring. They say nothing about the works."""

from django.contrib.auth.decorators import login_not_required
from django.db import DatabaseError, connection
from django.db.migrations.executor import MigrationExecutor
from django.http import HttpRequest, HttpResponse
from django.views.decorators.cache import never_cache
from django.views.decorators.http import require_safe


@login_not_required
@never_cache
@require_safe
def alive(request: HttpRequest) -> HttpResponse:
    """This process answers."""
    return HttpResponse("alive\n", content_type="text/plain")


@login_not_required
@never_cache
@require_safe
def ready(request: HttpRequest) -> HttpResponse:
    """The database answers and has every migration; 503 otherwise.

    The broker isn't asked: work waits in the database while it is down, and pages go on being served.
    """
    try:
        executor = MigrationExecutor(connection)
        waiting = executor.migration_plan(executor.loader.graph.leaf_nodes())
    except DatabaseError:
        return HttpResponse("the database does not answer\n", status=503, content_type="text/plain")
    if waiting:
        return HttpResponse(f"{len(waiting)} migrations to apply\n", status=503, content_type="text/plain")
    return HttpResponse("ready\n", content_type="text/plain")


# Read by the walk over all addresses.
alive.permission = "public"  # type: ignore[attr-defined]
ready.permission = "public"  # type: ignore[attr-defined]
