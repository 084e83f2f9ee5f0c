"""Signing in and out, the password, and day or night colours."""

from __future__ import annotations

import pytest
from django.test import Client
from django.urls import reverse

from tests import people

pytestmark = pytest.mark.django_db


def sign_in(client: Client, username: str, password: str, **more: str):
    return client.post(reverse("accounts:sign_in"), {"username": username, "password": password, **more})


class TestSignIn:
    def test_the_right_pair_leads_to_the_works(self):
        people.small_works()
        client = Client()
        assert sign_in(client, "olga", people.PASSWORD).url == "/"
        assert "Testing Ford Water Works" in client.get("/").content.decode()

    def test_the_page_that_was_asked_for_comes_after(self):
        people.person("olga")
        answer = sign_in(Client(), "olga", people.PASSWORD, next="/help/board/")
        assert answer.url == "/help/board/"

    def test_it_never_leads_to_another_site(self):
        people.person("olga")
        assert sign_in(Client(), "olga", people.PASSWORD, next="https://elsewhere.example/").url == "/"

    @pytest.mark.parametrize(("username", "password"), [("olga", "wrong"), ("nobody", people.PASSWORD)])
    def test_a_wrong_pair_does_not_say_which_was_wrong(self, username, password):
        people.person("olga")
        page = sign_in(Client(), username, password).content.decode()
        assert "This name and password do not go together." in page

    def test_a_page_of_a_works_asks_to_sign_in_first(self):
        people.small_works()
        answer = Client().get("/w/TST/")
        assert (answer.status_code, answer.url) == (302, "/sign-in/?next=/w/TST/")

    def test_signing_out_is_a_post_and_ends_it(self):
        people.small_works()
        client = people.signed_in("olga")
        assert client.get(reverse("accounts:sign_out")).status_code == 405
        client.post(reverse("accounts:sign_out"))
        assert client.get("/").status_code == 302

    def test_too_many_tries_are_answered_in_words(self, settings):
        settings.AXES_ENABLED = True
        people.person("olga")
        client = Client()
        answers = [sign_in(client, "olga", "wrong") for _ in range(settings.AXES_FAILURE_LIMIT + 1)]
        assert answers[-1].status_code == 429
        assert "cannot sign in from here for a quarter of an hour" in answers[-1].content.decode()


class TestPassword:
    NEW = "a longer river runs 12"

    def change(self, client: Client, old: str, new: str):
        data = {"old_password": old, "new_password1": new, "new_password2": new}
        return client.post(reverse("accounts:password"), data, follow=True)

    def test_it_changes_and_the_person_stays_signed_in(self):
        client = people.signed_in("olga")
        page = self.change(client, people.PASSWORD, self.NEW).content.decode()
        assert "Your password is changed." in page
        assert client.get("/").status_code == 200
        assert people.person("olga").check_password(self.NEW)

    def test_other_sessions_end(self):
        elsewhere, here = people.signed_in("olga"), people.signed_in("olga")
        self.change(here, people.PASSWORD, self.NEW)
        assert elsewhere.get("/").status_code == 302

    @pytest.mark.parametrize(("old", "new"), [("wrong", NEW), (people.PASSWORD, "short"), (people.PASSWORD, "1234567890123")])
    def test_a_wrong_old_or_a_weak_new_one_changes_nothing(self, old, new):
        page = self.change(people.signed_in("olga"), old, new).content.decode()
        assert 'class="answer error"' in page
        assert people.person("olga").check_password(people.PASSWORD)


class TestColours:
    def test_a_choice_is_kept_and_shown_without_a_script(self):
        client = Client()
        client.post(reverse("accounts:theme"), {"theme": "night", "next": "/sign-in/"})
        assert '<html lang="en" data-theme="night">' in client.get("/sign-in/").content.decode()

    def test_the_device_decides_again(self):
        client = Client()
        client.post(reverse("accounts:theme"), {"theme": "night"})
        client.post(reverse("accounts:theme"), {"theme": "device"})
        assert '<html lang="en">' in client.get("/sign-in/").content.decode()

    def test_a_made_up_cookie_does_not_reach_the_page(self):
        client = Client()
        client.cookies["theme"] = '"><script>'
        assert '<html lang="en">' in client.get("/sign-in/").content.decode()

    @pytest.mark.parametrize("back", ["https://elsewhere.example/", "//elsewhere.example/", "javascript:alert(1)"])
    def test_it_never_leads_to_another_site(self, back):
        assert Client().post(reverse("accounts:theme"), {"theme": "day", "next": back}).url == "/"

    def test_it_is_a_post(self):
        assert Client().get(reverse("accounts:theme")).status_code == 405
