"""Parts of a back-up: sealing, what is kept, what is refused; the drill itself is in tests/operations."""

import datetime as dt
import gzip
import io
import tarfile
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from deploy.backups import archive, keeping, nightly, sealing
from plant.jobs import models

KEY = b"k" * 40
NOW = dt.datetime(2026, 11, 30, 3, tzinfo=dt.UTC)


def sealed(data: bytes, key: bytes = KEY) -> bytes:
    out = io.BytesIO()
    sealing.seal(io.BytesIO(data), out, key)
    return out.getvalue()


def opened(data: bytes, key: bytes = KEY) -> bytes:
    out = io.BytesIO()
    sealing.unseal(io.BytesIO(data), out, key)
    return out.getvalue()


class TestSealing:
    @pytest.mark.parametrize("length", [0, 1, sealing.PIECE - 1, sealing.PIECE, sealing.PIECE + 1, 3 * sealing.PIECE])
    def test_what_goes_in_comes_out(self, length):
        data = bytes(number % 251 for number in range(length))
        assert opened(sealed(data)) == data

    def test_nothing_of_it_can_be_read(self):
        assert b"hypochlorite" not in sealed(b"hypochlorite" * 50)

    def test_the_same_twice_looks_different(self):
        assert sealed(b"same") != sealed(b"same")

    def test_another_key_does_not_open_it(self):
        with pytest.raises(sealing.CannotOpen):
            opened(sealed(b"data"), b"l" * 40)

    @given(st.data())
    @settings(max_examples=60, deadline=None)
    def test_any_altered_byte_is_noticed(self, data):
        whole = bytearray(sealed(b"the book of a works"))
        place = data.draw(st.integers(0, len(whole) - 1))
        whole[place] ^= data.draw(st.integers(1, 255))
        with pytest.raises(sealing.CannotOpen):
            opened(bytes(whole))

    def test_pieces_cut_off_or_exchanged_are_noticed(self):
        whole = sealed(b"x" * (2 * sealing.PIECE + 5))
        start = len(sealing.MARK) + sealing.SALT_LENGTH + sealing.PREFIX_LENGTH
        step = sealing.PIECE + sealing.TAG_LENGTH
        first, second, rest = whole[start : start + step], whole[start + step : start + 2 * step], whole[start + 2 * step :]
        for changed in (first + second, second + first + rest, first + second + second + rest, first):
            with pytest.raises(sealing.CannotOpen):
                opened(whole[:start] + changed)

    def test_a_short_key_is_refused(self, tmp_path):
        (tmp_path / "key").write_text("secret\n")
        with pytest.raises(sealing.BadKey, match="32 random"):
            sealing.read_key(tmp_path / "key")

    def test_a_made_key_is_good(self, tmp_path):
        (tmp_path / "key").write_text(sealing.new_key() + "\n")
        assert len(sealing.read_key(tmp_path / "key")) >= sealing.SHORTEST_KEY


class TestKeeping:
    def test_a_name_tells_its_moment(self):
        for is_sealed in (True, False):
            assert keeping.moment_of(Path(keeping.name_of(NOW, sealed=is_sealed))) == NOW
        assert keeping.moment_of(Path("weirbook-notes.txt")) is None

    def test_after_three_years_of_nights(self):
        """Played night by night, as it happens."""
        kept: set[dt.datetime] = set()
        for night in range(3 * 365):
            now = NOW + dt.timedelta(days=night)
            kept.add(now)
            kept -= keeping.superfluous(kept, now)
        ages = sorted((now - moment).days for moment in kept)
        assert ages[:15] == list(range(15))
        assert len([age for age in ages if 14 < age <= 56]) in (5, 6, 7, 8)
        assert 12 <= len([age for age in ages if age > 56]) <= 24
        assert max(ages) <= keeping.MONTHLY_FOR.days

    def test_the_last_one_stays_however_old(self):
        old = NOW - dt.timedelta(days=3000)
        assert keeping.superfluous([old, old - dt.timedelta(days=1)], NOW) == {old - dt.timedelta(days=1)}

    def test_other_files_are_left_alone(self, tmp_path):
        for name in ("notes.txt", keeping.name_of(NOW, sealed=False), keeping.name_of(NOW - dt.timedelta(days=3000), sealed=True)):
            (tmp_path / name).touch()
        removed = keeping.remove_superfluous(tmp_path, NOW)
        assert [path.name for path in removed] == [keeping.name_of(NOW - dt.timedelta(days=3000), sealed=True)]
        assert (tmp_path / "notes.txt").exists()


class TestArchive:
    def test_something_else_is_refused(self, tmp_path):
        (tmp_path / "x.tar.gz").write_bytes(gzip.compress(b"hello" * 1000))
        with pytest.raises(archive.NotABackUp):
            archive.unpack(tmp_path / "x.tar.gz", tmp_path / "out")

    def made(self, tmp_path: Path, **changes: bytes) -> Path:
        folder = tmp_path / "tables"
        folder.mkdir()
        (folder / "a.b.jsonl").write_bytes(b"[1]\n")
        table = archive.Table(["id"], 1, archive.digest_of(folder / "a.b.jsonl"))
        contents = archive.Contents(archive.FORMAT, "", "sqlite", [], [], {"a.b": table})
        for name, data in changes.items():
            (folder / name.replace("__", ".")).write_bytes(data)
        archive.pack(folder, tmp_path / "no files", contents, tmp_path / "packed")
        return tmp_path / "packed"

    def test_whole_is_whole(self, tmp_path):
        contents = archive.unpack(self.made(tmp_path), tmp_path / "out")
        assert contents.tables["a.b"].rows == 1

    def test_an_altered_table_is_noticed(self, tmp_path):
        with pytest.raises(archive.NotABackUp, match="not as it was written"):
            archive.unpack(self.made(tmp_path, a__b__jsonl=b"[2]\n"), tmp_path / "out")

    def test_a_cut_file_is_noticed(self, tmp_path):
        packed = self.made(tmp_path)
        packed.write_bytes(packed.read_bytes()[:-40])
        with pytest.raises(archive.NotABackUp):
            archive.unpack(packed, tmp_path / "out")

    @pytest.mark.parametrize("name", ["../outside", "/outside", "tables/../../outside"])
    def test_nothing_is_written_outside(self, tmp_path, name):
        with tarfile.open(tmp_path / "evil", "w:gz") as tar:
            info = tarfile.TarInfo(name)
            info.size = 4
            tar.addfile(info, io.BytesIO(b"evil"))
        (tmp_path / "in").mkdir()
        with pytest.raises(archive.NotABackUp):
            archive.unpack(tmp_path / "evil", tmp_path / "in")
        assert not (tmp_path / "outside").exists()

    def test_links_are_refused(self, tmp_path):
        with tarfile.open(tmp_path / "evil", "w:gz") as tar:
            info = tarfile.TarInfo("files/link")
            info.type, info.linkname = tarfile.SYMTYPE, "/etc/passwd"
            tar.addfile(info)
        with pytest.raises(archive.NotABackUp):
            archive.unpack(tmp_path / "evil", tmp_path / "in")


@pytest.mark.django_db
class TestNightly:
    def test_is_asked_for_once_a_night_and_only_where_a_folder_is_named(self, settings, tmp_path):
        nightly.ask(now=NOW)
        assert models.Job.objects.count() == 0
        settings.WEIRBOOK_BACKUPS = str(tmp_path)
        for now in (NOW.replace(hour=0), NOW, NOW + dt.timedelta(minutes=30)):
            nightly.ask(now=now)
        models.Job.objects.update(state=models.Job.State.DONE)
        nightly.ask(now=NOW + dt.timedelta(hours=1))
        assert [job.key for job in models.Job.objects.all()] == ["2026-11-30"]
        nightly.ask(now=NOW + dt.timedelta(days=1))
        assert models.Job.objects.count() == 2
