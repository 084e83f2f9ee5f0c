"""The book: entries in a chain, rows that are only added, and what verify finds when somebody went behind its back."""

import datetime as dt
import json
import threading

import pytest
from django.db import DatabaseError, IntegrityError, connection, transaction

from plant.ledger import actions, locks, models, queries, verify
from plant.readings.models import Reading, Settlement
from plant.works.models import Statement

pytestmark = pytest.mark.django_db
NOW = dt.datetime(2026, 3, 1, 6, tzinfo=dt.UTC)


@pytest.fixture
def book():
    return actions.open_book(code="LEDG", now=NOW)


def reading(value: float = 7.2, **more) -> Reading:
    return Reading(site="ENTRY", parameter="pH", taken_at=NOW, value=value, value_text=str(value), typed=str(value), **more)


def append(book, *rows, client_id="one", received=None, now=NOW):
    return actions.append(
        book=book, client_id=client_id, kind="line", received=received or {"client": client_id}, rows=rows, by=None, now=now
    )


class TestAppend:
    def test_rows_are_named_by_seq_and_line(self, book):
        done = append(book, reading(), reading(7.3, sample="2"))
        assert [row.ref for row in done.rows] == ["1.1", "1.2"]
        assert book.head_seq == 1
        assert json.loads(done.entry.payload)["rows"][1]["value"] == 7.3

    def test_the_same_entry_again_is_the_same_entry(self, book):
        first = append(book, reading())
        again = append(book, reading())
        assert (again.created, again.entry.pk) == (False, first.entry.pk)
        assert Reading.objects.count() == 1

    def test_the_same_id_with_other_content_is_refused(self, book):
        append(book, reading())
        with pytest.raises(actions.ContentDiffers):
            append(book, reading(), received={"other": True})

    def test_recorded_time_never_runs_backwards(self, book):
        append(book, reading())
        earlier = append(book, reading(), client_id="two", now=NOW - dt.timedelta(hours=1))
        assert earlier.entry.recorded_at == NOW
        with pytest.raises(actions.EarlierThanBook):
            actions.refuse_earlier(book, NOW - dt.timedelta(hours=1))

    def test_a_row_of_another_works_is_refused(self, book):
        other = actions.open_book(code="OTHER", now=NOW)
        (foreign,) = append(other, reading()).rows
        with pytest.raises(actions.CrossesWorks):
            append(book, reading(7.4, supersedes=foreign, reason="wrong works"))
        assert models.Entry.objects.filter(book=book).count() == 0


class TestCorrections:
    def test_the_new_row_stands_and_the_old_is_askable(self, book):
        (old,) = append(book, reading(740.0)).rows
        append(book, reading(7.4, supersedes=old, reason="decimal point lost"), client_id="two")
        assert list(Reading.objects.as_known().values_list("value", flat=True)) == [7.4]
        assert list(Reading.objects.as_known(1).values_list("value", flat=True)) == [740.0]

    def test_a_chain_does_not_fork(self, book):
        (old,) = append(book, reading(740.0)).rows
        append(book, reading(7.4, supersedes=old, reason="decimal point lost"), client_id="two")
        with pytest.raises(IntegrityError), transaction.atomic():
            append(book, reading(7.5, supersedes=old, reason="misread"), client_id="three")
        assert models.Entry.objects.filter(book=book).count() == 2

    def test_a_correction_has_a_reason_and_a_void_something_to_void(self, book):
        (old,) = append(book, reading()).rows
        with pytest.raises(IntegrityError), transaction.atomic():
            append(book, reading(7.4, supersedes=old), client_id="two")
        with pytest.raises(IntegrityError), transaction.atomic():
            append(book, reading(voided=True, reason="never was"), client_id="three")

    def test_a_void_is_a_row(self, book):
        (old,) = append(book, reading()).rows
        append(book, reading(supersedes=old, voided=True, reason="wrong sample"), client_id="two")
        assert not Reading.objects.as_known().exists()
        assert Reading.objects.count() == 2

    def test_known_at_resolves_to_a_seq(self, book):
        append(book, reading())
        append(book, reading(), client_id="two", now=NOW + dt.timedelta(hours=2))
        assert queries.seq_known_at(book, NOW - dt.timedelta(seconds=1)) == 0
        assert queries.seq_known_at(book, NOW + dt.timedelta(hours=1)) == 1
        assert queries.seq_known_at(book, None) is None


def append_only_models():
    from django.apps import apps

    return [model for model in apps.get_models() if issubclass(model, models.AppendOnly)]


class TestLocks:
    def test_the_orm_refuses(self, book):
        (row,) = append(book, reading()).rows
        with pytest.raises(models.AppendOnlyError):
            row.save()
        with pytest.raises(models.AppendOnlyError):
            row.delete()
        for change in (
            lambda: Reading.objects.update(value=1),
            lambda: Reading.objects.all().delete(),
            lambda: Reading.objects.bulk_update([row], ["value"]),
            lambda: Reading._base_manager.update(value=1),
        ):
            with pytest.raises(models.AppendOnlyError):
                change()

    def test_every_append_only_table_is_locked(self):
        assert locks.missing(connection) == []
        assert {model._meta.db_table for model in append_only_models()} == set(locks.tables())

    @pytest.mark.parametrize("verb", ["UPDATE {} SET seq = 99", "DELETE FROM {}"])
    def test_the_database_refuses(self, book, verb):
        (row,) = append(book, reading()).rows
        append(book, Settlement(reading=row, decision="stands", reason="seen"), client_id="two")
        append(book, Statement(kind="parameter", subject="x", value={}, effective_from=NOW, reason="r"), client_id="three")
        for table in ("ledger_entry", "readings_reading", "readings_settlement", "works_statement"):
            with pytest.raises(DatabaseError, match="append-only"), transaction.atomic(), connection.cursor() as cursor:
                cursor.execute(verb.format(table))

    def test_postgresql_refuses_truncate(self, book):
        if connection.vendor != "postgresql":
            with pytest.raises(DatabaseError, match="append-only"), transaction.atomic(), connection.cursor() as cursor:
                append(book, reading())
                cursor.execute("DELETE FROM readings_reading")
            return
        with pytest.raises(DatabaseError, match="append-only"), transaction.atomic(), connection.cursor() as cursor:
            cursor.execute("TRUNCATE readings_reading CASCADE")


def unlocked(table):
    """Goes behind the back of the locks, as somebody with the owner's rights could."""
    with connection.cursor() as cursor:
        if connection.vendor == "postgresql":
            cursor.execute(f"DROP TRIGGER lock_{table} ON {table}")
        else:
            for verb in ("update", "delete"):
                cursor.execute(f"DROP TRIGGER lock_{table}_{verb}")


class TestVerify:
    def test_an_honest_book_has_no_findings(self, book):
        (old,) = append(book, reading(740.0)).rows
        append(book, reading(7.4, supersedes=old, reason="decimal point lost"), client_id="two")
        assert list(verify.everything()) == []

    @pytest.mark.parametrize(
        ("table", "change", "found"),
        [
            ("readings_reading", "UPDATE readings_reading SET value = 7.9", "differs in value"),
            ("readings_reading", "DELETE FROM readings_reading WHERE line = 2", "is missing from its table"),
            ("ledger_entry", "UPDATE ledger_entry SET device = 'tablet 9'", "the chain is broken"),
            ("ledger_entry", 'UPDATE ledger_entry SET payload = \'{"received":{},"rows":[]}\'', "the chain is broken"),
        ],
    )
    def test_what_was_altered_is_found(self, book, table, change, found):
        append(book, reading(), reading(7.3, sample="2"))
        unlocked(table)
        with connection.cursor() as cursor:
            cursor.execute(change)
        findings = list(verify.everything())
        assert any(found in line for line in findings)
        assert any(f"locks: {table}" in line for line in findings)

    def test_a_row_slipped_in_is_found(self, book):
        entry = append(book, reading()).entry
        Reading.objects.bulk_create([reading(9.9, book=book, entry=entry, seq=1, line=7)])
        assert any("was added later" in line for line in verify.everything())

    def test_a_cut_tail_is_found(self, book):
        append(book, reading())
        append(book, reading(), client_id="two")
        for table in ("readings_reading", "ledger_entry"):
            unlocked(table)
            with connection.cursor() as cursor:
                cursor.execute(f"DELETE FROM {table} WHERE seq = 2")
        assert any("its tail may be missing" in line for line in verify.everything())


@pytest.mark.django_db(transaction=True)
def test_two_writers_make_one_gapless_chain():
    """Eight threads, ten entries each, one book: 80 entries, no gap, no fork, no error."""
    book = actions.open_book(code="BUSY", now=NOW)
    problems = []

    def write(number):
        try:
            for n in range(10):
                own = models.Book.objects.get(pk=book.pk)
                append(own, reading(), client_id=f"{number}-{n}")
        except DatabaseError as problem:
            problems.append(problem)
        finally:
            connection.close()

    threads = [threading.Thread(target=write, args=(number,)) for number in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert problems == []
    assert list(models.Entry.objects.filter(book=book).order_by("seq").values_list("seq", flat=True)) == list(range(1, 81))
    assert list(verify.chain(models.Book.objects.get(pk=book.pk))) == []
