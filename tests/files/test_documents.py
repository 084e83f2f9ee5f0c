"""Documents: what they may be, that they are kept once and whole, who sees them, and that a changed byte is found."""

from __future__ import annotations

import datetime as dt
import io
import uuid

import pytest
from django.test import Client
from PIL import Image

from plant.files import actions, kinds, queries
from plant.files.models import Document
from plant.ledger import verify
from plant.ledger.models import AppendOnlyError, Entry
from tests import people

pytestmark = pytest.mark.django_db(transaction=True)
MADE = "2026-03-10T08:00:00+01:00"
ABOUT = str(uuid.UUID(int=7))


@pytest.fixture
def book(settings, tmp_path):
    settings.WEIRBOOK_FILES = tmp_path / "files"
    return people.small_works()


def picture(kind="JPEG", size=(40, 30), colour="navy") -> bytes:
    out = io.BytesIO()
    Image.new("RGB", size, colour).save(out, kind)
    return out.getvalue()


def client(username: str) -> Client:
    out = Client()
    out.force_login(people.person(username))
    return out


def send(who: Client, content: bytes, ident: str | None = None, **said):
    said = {"about": ABOUT, "site": "ENTRY", "parameter": "pH", "made_at": MADE, "name": "gauge.jpg"} | said
    address = f"/w/TST/photos/{ident or uuid.uuid4()}"
    return who.put(address, content, content_type="image/jpeg", query_params=said)


class TestKinds:
    @pytest.mark.parametrize(("kind", "media_type"), [("JPEG", "image/jpeg"), ("PNG", "image/png"), ("WEBP", "image/webp")])
    def test_is_told_by_the_content(self, kind, media_type):
        assert kinds.media_type(picture(kind)) == media_type

    def test_a_pdf(self):
        assert kinds.media_type(b"%PDF-1.7\n...") == "application/pdf"

    @pytest.mark.parametrize(
        ("content", "why"),
        [
            (b"", "empty"),
            (b"<svg xmlns='http://www.w3.org/2000/svg'><script>alert(1)</script></svg>", "no JPEG"),
            (b"<html><script>alert(1)</script>", "no JPEG"),
            (b"\xff\xd8\xff\xe0" + b"x" * 100, "no JPEG"),
            (b"MZ" + b"\0" * 200, "no JPEG"),
            (b"%PDF-" + b"x" * kinds.MOST_BYTES, "at most 5 MB"),
        ],
    )
    def test_anything_else_is_refused_in_words(self, content, why):
        with pytest.raises(kinds.NotKept, match=why):
            kinds.media_type(content)

    def test_a_picture_that_would_fill_the_memory_is_refused_unread(self):
        bomb = io.BytesIO()
        Image.new("1", (20_000, 20_000)).save(bomb, "PNG")
        assert len(bomb.getvalue()) < 200_000
        with pytest.raises(kinds.NotKept):
            kinds.media_type(bomb.getvalue())


class TestSending:
    def test_is_kept_once_however_often_it_is_sent(self, book):
        ident, olga = str(uuid.uuid4()), client("olga")
        answers = [send(olga, picture(), ident) for _ in range(3)]
        assert [answer.status_code for answer in answers] == [201, 200, 200]
        kept = Document.objects.get()
        assert (kept.about, kept.site, kept.parameter, kept.media_type) == (ABOUT, "ENTRY", "pH", "image/jpeg")
        assert queries.path_of(kept.sha256).read_bytes() == picture()
        assert Entry.objects.get(kind="document").recorded_by == people.person("olga")
        assert list(verify.everything()) == []

    def test_another_picture_under_the_same_id_is_refused(self, book):
        ident, olga = str(uuid.uuid4()), client("olga")
        send(olga, picture(), ident)
        assert send(olga, picture(colour="red"), ident).status_code == 409
        assert Document.objects.count() == 1

    def test_the_same_picture_twice_needs_its_room_once(self, book):
        olga = client("olga")
        send(olga, picture())
        send(olga, picture())
        assert Document.objects.count() == 2
        assert len([path for path in queries.path_of("").rglob("*") if path.is_file()]) == 1

    @pytest.mark.parametrize(
        ("said", "content", "status"),
        [
            ({"made_at": "yesterday"}, picture(), 422),
            ({"made_at": "2026-03-10T08:00"}, picture(), 422),
            ({"about": "../../etc"}, picture(), 422),
            ({}, b"no picture", 422),
            ({}, b"\xff" * (kinds.MOST_BYTES + 1), 413),
        ],
    )
    def test_bad_input_is_refused_and_leaves_nothing(self, book, said, content, status):
        answer = send(client("olga"), content, **said)
        assert answer.status_code == status
        assert answer.json()["general"]
        assert Document.objects.count() == 0
        assert not queries.path_of("").exists()

    def test_a_name_keeps_no_folders_and_nothing_unprintable(self, book):
        send(client("olga"), picture(), name="../../a\nb\u202egpj.exe")
        assert Document.objects.get().name == "abgpj.exe"

    def test_is_for_those_who_may_enter(self, book):
        assert send(Client(), picture()).status_code == 401
        people.person("stan")
        assert send(client("stan"), picture()).status_code == 404


class TestSeeing:
    @pytest.fixture
    def kept(self, book):
        send(client("olga"), picture())
        return Document.objects.get()

    def test_a_member_sees_it_and_nothing_in_it_can_run(self, kept):
        answer = client("ira").get(f"/w/TST/documents/{kept.ref}/")
        assert answer.status_code == 200
        assert answer.content == picture()
        assert answer["Content-Type"] == "image/jpeg"
        assert answer["X-Content-Type-Options"] == "nosniff"
        assert answer["Content-Security-Policy"] == "default-src 'none'; sandbox"

    def test_a_stranger_and_an_unknown_name_get_no_such_page(self, kept):
        people.person("stan")
        assert client("stan").get(f"/w/TST/documents/{kept.ref}/").status_code == 404
        for ref in ("999.1", "x", "1.x", "9" * 30 + ".1"):
            assert client("olga").get(f"/w/TST/documents/{ref}/").status_code == 404

    def test_one_that_is_gone_from_the_disk_says_so(self, kept):
        queries.path_of(kept.sha256).unlink()
        assert client("olga").get(f"/w/TST/documents/{kept.ref}/").status_code == 404


class TestVerify:
    def test_one_changed_byte_and_a_missing_file_are_found(self, book):
        olga = client("olga")
        send(olga, picture())
        send(olga, picture(colour="red"))
        one, other = Document.objects.order_by("seq")
        path = queries.path_of(one.sha256)
        path.write_bytes(path.read_bytes()[:-1] + b"\0")
        queries.path_of(other.sha256).unlink()
        found = list(verify.everything())
        assert len(found) == 2
        assert f"document {one.ref} (gauge.jpg) is not what was kept" in found[0]
        assert f"document {other.ref} (gauge.jpg) is not in the folder" in found[1]

    def test_a_row_is_never_changed(self, book):
        send(client("olga"), picture())
        kept = Document.objects.get()
        with pytest.raises(AppendOnlyError):
            kept.save()

    def test_a_disk_that_is_full_leaves_neither_row_nor_half_a_file(self, book, monkeypatch):
        def full(_):
            raise OSError(28, "No space left on device")

        monkeypatch.setattr(actions.os, "fsync", full)
        with pytest.raises(OSError, match="No space"):
            actions.document(content=picture(), name="a.jpg", about=ABOUT, made_at=dt.datetime.fromisoformat(MADE))
        assert [path for path in queries.path_of("").rglob("*") if path.is_file()] == []
