"""Guessing is braked, sign-ins end, the second factor holds, and all of it is written down."""

import datetime as dt
import re
from io import StringIO

import pytest
from django.conf import settings as site
from django.contrib.auth.hashers import get_hasher
from django.core.management import call_command
from django.db import DatabaseError, connection, transaction
from django.test import Client
from django.urls import reverse

from deploy.settings import base
from plant import clock
from plant.accounts import actions, security, totp
from plant.accounts.models import SecondFactor, SecurityEvent
from tests import people

pytestmark = pytest.mark.django_db
NOW = dt.datetime(2026, 3, 10, 8, tzinfo=dt.UTC)
KIND = SecurityEvent.Kind


@pytest.fixture
def at(monkeypatch):
    """Sets the clock; `at(minutes=5)` moves it on."""
    moment = [NOW]
    monkeypatch.setattr(clock, "now", lambda: moment[0])

    def move(**by: float) -> dt.datetime:
        moment[0] += dt.timedelta(**by)
        return moment[0]

    return move


def sign_in(client: Client, username: str = "sam", password: str = people.PASSWORD, **more):
    return client.post(reverse("accounts:sign_in"), {"username": username, "password": password}, **more)


def signed_in(client: Client) -> bool:
    return client.get("/").status_code == 200


def kinds() -> list[str]:
    return list(SecurityEvent.objects.order_by("pk").values_list("kind", flat=True))


class TestPasswords:
    def test_are_hashed_with_argon2(self, settings):
        settings.PASSWORD_HASHERS = base.PASSWORD_HASHERS
        assert get_hasher("default").algorithm == "argon2"
        person = people.person("olga")
        person.set_password(people.PASSWORD)
        assert person.password.startswith("argon2$argon2id$")

    @pytest.mark.parametrize("bad", ["short7!", "1234567890123", "password123", "samsundby1"])
    def test_bad_ones_are_refused(self, bad):
        with pytest.raises(actions.PersonRefused):
            actions.add_person(username="sam", full_name="Sam Sundby", password=bad, by=None, now=NOW)


class TestBrakes:
    @pytest.fixture(autouse=True)
    def _on(self, settings):
        settings.AXES_ENABLED = True

    def test_a_name_is_locked_after_six_even_with_the_right_password(self):
        people.person("sam")
        client = Client()
        answers = [sign_in(client, password="wrong").status_code for _ in range(site.AXES_FAILURE_LIMIT + 2)]
        assert answers[0] == 200
        assert answers[-1] == 429
        assert sign_in(client).status_code == 429
        assert not signed_in(client)
        assert KIND.LOCKED_OUT in kinds()

    def test_another_address_is_not_locked_with_it(self):
        people.person("sam")
        for _ in range(site.AXES_FAILURE_LIMIT + 1):
            sign_in(Client(), password="wrong", REMOTE_ADDR="198.51.100.7")
        client = Client()
        assert sign_in(client, REMOTE_ADDR="198.51.100.8").status_code == 302

    def test_many_names_from_one_address_are_braked_too(self, at):
        people.person("sam")
        for number in range(security.MOST_REFUSED_FROM_ADDRESS):
            assert sign_in(Client(), username=f"guess{number}", password="water").status_code == 200
        assert sign_in(Client()).status_code == 429
        at(minutes=16)
        assert sign_in(Client()).status_code == 302

    def test_a_right_sign_in_forgets_the_wrong_ones(self):
        people.person("sam")
        for _ in range(3):
            for _ in range(site.AXES_FAILURE_LIMIT - 1):
                sign_in(Client(), password="wrong")
            assert sign_in(Client()).status_code == 302

    def test_guessing_in_the_form_of_the_second_factor_is_braked_like_a_sign_in(self):
        client = Client()
        people.person("sam")
        sign_in(client)
        address = reverse("accounts:second_factor")
        for _ in range(site.AXES_FAILURE_LIMIT + 1):
            answer = client.post(address, {"password": "wrong", "code": "000000"})
        assert answer.status_code == 429


class TestSessions:
    @pytest.fixture(autouse=True)
    def _limits(self, settings, at):
        settings.WEIRBOOK_SESSION_HOURS, settings.WEIRBOOK_SESSION_IDLE_HOURS = 14, 5
        people.person("sam")

    def test_end_after_a_shift_however_much_they_are_used(self, at):
        client = Client()
        sign_in(client)
        for _ in range(6):
            at(hours=2)
            assert signed_in(client)
        at(hours=2, minutes=1)
        assert not signed_in(client)
        assert kinds()[-1] == KIND.SESSION_ENDED

    def test_end_when_unused(self, at):
        client = Client()
        sign_in(client)
        assert signed_in(client)
        at(hours=5, minutes=2)
        assert not signed_in(client)

    def test_what_the_board_fetches_by_itself_is_no_use(self, at):
        people.small_works()
        client = Client()
        sign_in(client)
        client.get("/")
        for _ in range(5):
            at(hours=1)
            client.get(reverse("board:board_now", args=["TST"]))
        at(minutes=2)
        assert not signed_in(client)

    def test_a_new_password_ends_them(self):
        client = Client()
        sign_in(client)
        assert signed_in(client)
        actions.give_new_password(person=people.person("sam"), by=None, now=NOW)
        assert not signed_in(client)

    def test_signing_out_ends_them(self):
        client = Client()
        sign_in(client)
        kept = client.cookies["sessionid"].value
        client.post(reverse("accounts:sign_out"))
        client.cookies["sessionid"] = kept
        assert not signed_in(client)
        assert kinds() == [KIND.SIGNED_IN, KIND.SIGNED_OUT]


@pytest.fixture
def telephone(at):
    """Sam's second factor in use; gives the code of a moment, and the recovery codes."""
    person = people.person("sam")
    secret = security.offer(person=person)
    recovery = security.confirm(person=person, code=totp.hotp(secret, totp.step_at(NOW.timestamp())), now=NOW)
    at(minutes=2)
    return (lambda: totp.hotp(secret, totp.step_at(clock.now().timestamp()))), recovery


class TestSecondFactor:
    def test_the_password_alone_signs_nobody_in(self, telephone):
        client = Client()
        assert sign_in(client).url == reverse("accounts:code")
        assert not signed_in(client)

    def test_the_code_does(self, telephone):
        code, _ = telephone
        client = Client()
        client.post(f"{reverse('accounts:sign_in')}?next=/help/", {"username": "sam", "password": people.PASSWORD, "next": "/help/"})
        answer = client.post(reverse("accounts:code"), {"code": code()})
        assert answer.url == "/help/"
        assert signed_in(client)

    def test_a_code_works_once(self, telephone):
        code, _ = telephone
        for expected in (302, 422):
            client = Client()
            sign_in(client)
            assert client.post(reverse("accounts:code"), {"code": code()}).status_code == expected

    def test_guessing_ends_after_five(self, telephone, at):
        code, _ = telephone
        client = Client()
        sign_in(client)
        for _ in range(security.MOST_CODES_REFUSED):
            assert client.post(reverse("accounts:code"), {"code": "000000"}).status_code == 422
        answer = client.post(reverse("accounts:code"), {"code": code()})
        assert "Wait a quarter of an hour" in answer.content.decode()
        assert not signed_in(client)
        at(minutes=16)
        sign_in(client)
        assert client.post(reverse("accounts:code"), {"code": code()}).status_code == 302

    def test_the_half_way_state_ends_after_five_minutes(self, telephone, at):
        code, _ = telephone
        client = Client()
        sign_in(client)
        at(minutes=6)
        assert client.post(reverse("accounts:code"), {"code": code()}).url == reverse("accounts:sign_in")
        assert not signed_in(client)

    def test_a_password_changed_half_way_ends_it(self, telephone):
        code, _ = telephone
        client = Client()
        sign_in(client)
        actions.give_new_password(person=people.person("sam"), by=None, now=clock.now())
        client.post(reverse("accounts:code"), {"code": code()})
        assert not signed_in(client)

    def test_a_recovery_code_works_once(self, telephone):
        _, recovery = telephone
        for expected in (302, 422):
            client = Client()
            sign_in(client)
            assert client.post(reverse("accounts:code"), {"code": recovery[0]}).status_code == expected
        assert kinds().count(KIND.RECOVERY_USED) == 1

    def test_it_is_taken_into_use_on_its_page_and_removed_with_the_password(self, at):
        people.person("sam")
        client = Client()
        sign_in(client)
        address = reverse("accounts:second_factor")
        key = re.search(r'<strong class="number">([A-Z2-7 ]+)</strong>', client.get(address).content.decode())[1]
        import base64

        secret = base64.b32decode(key.replace(" ", ""))
        now_code = totp.hotp(secret, totp.step_at(NOW.timestamp()))
        assert client.post(address, {"password": "wrong", "code": now_code}).status_code == 422
        assert client.post(address, {"password": people.PASSWORD, "code": "12"}).status_code == 422
        assert not security.has_second_factor(people.person("sam"))
        page = client.post(address, {"password": people.PASSWORD, "code": now_code}).content.decode()
        assert len(re.findall(r"[0-9a-f]{6}-[0-9a-f]{6}", page)) == security.RECOVERY_CODES
        assert security.has_second_factor(people.person("sam"))
        assert client.post(address, {"password": "wrong"}).status_code == 422
        client.post(address, {"password": people.PASSWORD})
        assert not security.has_second_factor(people.person("sam"))
        assert kinds()[-2:] == [KIND.FACTOR_ADDED, KIND.FACTOR_REMOVED]

    def test_the_secret_lies_sealed_and_survives_a_change_of_key(self, telephone, settings):
        person = people.person("sam")
        row = SecondFactor.objects.get()
        secret = security._unseal(row.sealed_secret)
        assert totp.in_base32(secret).replace(" ", "") not in row.sealed_secret
        old, settings.SECRET_KEY = settings.SECRET_KEY, "another key " * 5
        with pytest.raises(security.Refused, match="key was changed"):
            security._unseal(row.sealed_secret)
        settings.SECRET_KEY_FALLBACKS = [old]
        assert security._unseal(row.sealed_secret) == secret
        assert person.second_factor.confirmed_at

    def test_whoever_lost_everything_is_helped_by_a_command(self, telephone):
        call_command("remove_second_factor", "sam", stdout=StringIO())
        client = Client()
        assert sign_in(client).url == "/"


class TestTheRecord:
    def test_names_nobody_bears_are_not_kept(self):
        sign_in(Client(), username="my secret password", password="x", REMOTE_ADDR="198.51.100.9")
        event = SecurityEvent.objects.get()
        assert (event.kind, event.person, event.address) == (KIND.REFUSED, None, "198.51.100.9")

    def test_what_is_done_to_people_is_in_it(self, at):
        adam = people.person("adam")
        person, _ = actions.add_person(username="nina", full_name="Nina Nord", by=adam, now=NOW)
        actions.give_new_password(person=person, by=adam, now=NOW)
        client = Client()
        client.force_login(person, backend="django.contrib.auth.backends.ModelBackend")
        given = actions.give_new_password(person=person, by=adam, now=NOW)
        client.force_login(person, backend="django.contrib.auth.backends.ModelBackend")
        own = "quiet weir in spring 4"
        client.post(reverse("accounts:password"), {"old_password": given, "new_password1": own, "new_password2": own})
        assert kinds() == [KIND.PERSON_ADDED, KIND.PASSWORD_REPLACED, KIND.PASSWORD_REPLACED, KIND.PASSWORD_CHANGED]
        out = StringIO()
        call_command("security_log", username="nina", stdout=out)
        assert "person_added      nina by adam" in out.getvalue()

    @pytest.mark.parametrize("statement", ["UPDATE accounts_securityevent SET kind = 'x'", "DELETE FROM accounts_securityevent"])
    def test_nothing_in_it_is_changed_or_removed(self, statement):
        sign_in(Client(), username="x", password="y")
        with pytest.raises(DatabaseError, match="append-only"), transaction.atomic(), connection.cursor() as cursor:
            cursor.execute(statement)
        assert SecurityEvent.objects.count() == 1


class TestSizes:
    @pytest.mark.parametrize(
        ("headers", "status"),
        [
            ({"CONTENT_LENGTH": str(31 * 1024 * 1024)}, 413),
            ({"CONTENT_LENGTH": "many"}, 413),
            ({"HTTP_TRANSFER_ENCODING": "chunked"}, 413),
            ({"CONTENT_LENGTH": "1000"}, 405),
        ],
    )
    def test_what_is_too_large_is_refused_unread(self, headers, status):
        assert Client().post("/healthz", **headers).status_code == status
