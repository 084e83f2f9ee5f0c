"""PostgreSQL set up as the README says: the owner migrates, the program works with its own few rights."""

import http.client
import json
import uuid
from datetime import UTC, datetime

import psycopg
import pytest

from tests import services
from tests.operations.site import ROOT, Day, Site, Tablet

pytestmark = [pytest.mark.service, pytest.mark.slow]
ROLES = (ROOT / "deploy" / "services" / "roles.sql").read_text()


@pytest.fixture
def server():
    try:
        postgres = services.Postgres()
    except services.NotHere as error:
        services.missing(str(error))
    yield postgres
    postgres.remove()


def as_role(url: str, role: str) -> str:
    return url.replace("postgres://postgres@", f"postgres://{role}@").rpartition("/")[0] + "/weirbook"


def run_roles(url: str) -> None:
    with psycopg.connect(url.replace("postgres://", "postgresql://", 1), autocommit=True) as link:
        link.execute(ROLES)


def test_a_days_work_with_the_programs_rights(server, tmp_path):
    superuser = as_role(server.url, "postgres")
    with psycopg.connect(server.url.replace("postgres://", "postgresql://", 1), autocommit=True) as link:
        link.execute("CREATE DATABASE weirbook")
    run_roles(superuser)
    site = Site(database_url=as_role(server.url, "weirbook_owner"))
    try:
        run_roles(superuser)
        site.environment["DATABASE_URL"] = as_role(server.url, "weirbook")
        port = services.free_port()
        site.web(port)
        site.start("manage.py", "work", name="work")

        day = Day([port])
        tablet = Tablet(port, "olga")
        day.send(tablet, str(uuid.uuid4()), day.body(1))
        for path in ("/w/TST/", "/w/TST/stock/", "/w/TST/readings/", "/w/TST/deviations/", "/w/TST/reports/"):
            status, _ = tablet.request("GET", path)
            assert status == 200, path
        tablet.drop()
        token = site.manage("api_token", "make", "machine", "--works", "TST", "--scope", "readings.write").stdout.strip()
        assert sent(port, token) == 201
        made = site.manage("back_up", "--to", str(tmp_path))
        assert "every record checked" in made.stdout
        site.manage("verify_records")
        site.manage("api_token", "revoke", "machine", "--works", "TST", "--why", "trial over")
        assert sent(port, token) == 401

        assert "permission denied" not in site.log(f"web-{port}") + site.log("work")
        refused = site.python("import django; django.setup()\nfrom plant.readings.models import Reading\n" + CHANGE)
        assert refused.strip() == "permission denied for table readings_reading"
        migrated = site.manage("migrate", "accounts", "zero", check=False)
        assert migrated.returncode != 0
    finally:
        site.close()


CHANGE = """
from django.db import DatabaseError, connection
try:
    connection.cursor().execute("UPDATE readings_reading SET value = 1")
except DatabaseError as refused:
    print(str(refused).splitlines()[0])
"""


def sent(port: int, token: str) -> int:
    """The status of a batch of one reading."""
    reading = {
        "site": "ENTRY",
        "timestamp": datetime.now(UTC).isoformat(timespec="seconds"),
        "parameter": "free_chlorine",
        "value": "0.05",
        "unit": "mg/L",
    }
    link = http.client.HTTPConnection("127.0.0.1", port, timeout=60)
    head = {"Authorization": f"Bearer {token}", "Content-Type": "application/json"}
    link.request("PUT", f"/api/w/TST/batches/{uuid.uuid4()}", json.dumps({"readings": [reading]}), head)
    status = link.getresponse().status
    link.close()
    return status
