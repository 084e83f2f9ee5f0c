"""The settings pages, walked by every role."""

import datetime as dt
import re

import pytest
from django.core.files.uploadedfile import SimpleUploadedFile
from django.urls import reverse

from plant import clock
from plant.accounts.models import Person
from plant.works import access, kinds, models, queries
from plant.works.urls import urlpatterns
from tests import people

pytestmark = pytest.mark.django_db
NOW = dt.datetime(2026, 3, 2, 9, 0, tzinfo=dt.UTC)
PAGES = [kind.name for kind in kinds.ALL if kind.page]


@pytest.fixture(autouse=True)
def at_nine(monkeypatch):
    monkeypatch.setattr(clock, "now", lambda: NOW)


@pytest.fixture
def book():
    return people.small_works()


def url(name, *args):
    return reverse(f"works:{name}", args=["TST", *args])


def text(answer):
    return re.sub(r"\s+", " ", answer.content.decode())


ASKED = {
    "settings": [],
    "file": [],
    "people": [],
    "add_person": [],
    "person": ["olga"],
    "end_membership": ["olga"],
    "new_password": ["olga"],
    "kind": ["meter"],
    "new": ["meter"],
    "subject": ["meter", "FT-TREATED"],
    "change": ["meter", "FT-TREATED"],
    "withdraw": ["limit", "entry-ph"],
}


def test_every_settings_page_is_walked_below():
    assert {pattern.name for pattern in urlpatterns if "/settings/" in str(pattern.pattern)} == ASKED.keys()


@pytest.mark.parametrize("name", sorted(ASKED))
@pytest.mark.parametrize("who", [*people.ROLES, "stan", None])
def test_each_role_and_a_stranger_at_each_page(book, client, name, who):
    at = client if who is None else people.signed_in(who)
    address = url(name, *ASKED[name])
    permission = next(pattern.callback.permission for pattern in urlpatterns if pattern.name == name)
    answer = at.post(address) if name in ("end_membership", "new_password") else at.get(address)
    if who is None:
        assert answer.status_code == 302
        assert answer.url.startswith("/sign-in/")
    elif who == "stan":
        assert answer.status_code == 404
    elif permission in access.ROLES[people.ROLES[who][0]]:
        assert answer.status_code in (200, 302)
    else:
        assert answer.status_code == 403
    if who != "adam":
        assert people.person("olga").check_password(people.PASSWORD)
        assert access.member(queries.stated(book), "olga", NOW) is not None


@pytest.mark.parametrize("kind", PAGES)
def test_every_kind_has_its_table_and_forms(book, kind):
    sam = people.signed_in("sam")
    assert sam.get(url("kind", kind)).status_code == 200
    if kind != "works":
        assert sam.get(url("new", kind)).status_code == 200
    for subject in queries.stated(book).subjects(kind):
        assert sam.get(url("subject", kind, subject)).status_code == 200
        assert sam.get(url("change", kind, subject)).status_code == 200


@pytest.mark.parametrize("kind", PAGES)
def test_a_form_sent_back_as_it_came_changes_nothing(book, kind):
    """What a form shows and what it reads are one and the same, for every key of every kind."""
    sam = people.signed_in("sam")
    stated = queries.stated(book)
    for subject in stated.subjects(kind):
        form = sam.get(url("change", kind, subject)).context["form"]
        data = {name: form[name].value() for name in form.fields} | {"reason": "as it is"}
        answer = sam.post(url("change", kind, subject), {name: value for name, value in data.items() if value is not None})
        assert answer.context["form"].errors == {}, subject
        left = answer.context["differences"]
        assert left == [], subject


def test_a_change_is_looked_at_and_then_stated(book):
    sam = people.signed_in("sam")
    address = url("change", "design_dose", "CAUSTIC-PH")
    seen = sam.get(address).context["form"]["seen"].value()
    typed = {"dose_mg_per_L": "7,5", "effective_from": "2026-03-03T07:00", "reason": "softer water", "seen": seen}
    before = models.Statement.objects.count()
    look = sam.post(address, typed)
    assert "<td>8</td><td>7.5</td>" in look.content.decode()
    assert models.Statement.objects.count() == before
    done = sam.post(address, typed | {"state": "yes"}, follow=True)
    assert "7.5" in text(done)
    stated = queries.stated(book)
    assert stated.design_dose_mg_l("CAUSTIC-PH", NOW) == 8.0
    assert stated.design_dose_mg_l("CAUSTIC-PH", dt.datetime(2026, 3, 3, 6, tzinfo=dt.UTC)) == 7.5
    assert "Will hold" in text(sam.get(url("subject", "design_dose", "CAUSTIC-PH")))
    assert "About to change" in text(sam.get(url("settings")))
    statement = models.Statement.objects.order_by("seq").last()
    assert (statement.entry.recorded_by.username, statement.reason) == ("sam", "softer water")


def test_two_people_with_the_same_form_open(book):
    sam, mira = people.signed_in("sam"), people.signed_in("mira")
    address = url("change", "design_dose", "CAUSTIC-PH")
    seen = sam.get(address).context["form"]["seen"].value()
    typed = {"effective_from": "2026-03-03T07:00", "reason": "because", "seen": seen, "state": "yes"}
    assert sam.post(address, typed | {"dose_mg_per_L": "7"}).status_code == 302
    second = mira.post(address, typed | {"dose_mg_per_L": "6"})
    assert "Sam Sundby has stated design dose CAUSTIC-PH" in text(second)
    assert queries.stated(book).design_dose_mg_l("CAUSTIC-PH", dt.datetime(2026, 4, 1, tzinfo=dt.UTC)) == 7


@pytest.mark.parametrize(
    ("field", "value", "words"),
    [
        ("dose_mg_per_L", "eight", "is not a number"),
        ("dose_mg_per_L", "-1", "not below 0"),
        ("dose_mg_per_L", "", "required"),
        ("reason", "", "required"),
        ("effective_from", "2026-03-29T02:30", "does not exist"),
        ("effective_from", "2026-10-25T02:30", "happened twice"),
    ],
)
def test_a_wrong_value_is_answered_beside_its_field(book, field, value, words):
    typed = {"dose_mg_per_L": "7", "effective_from": "2026-03-03T07:00", "reason": "because", "state": "yes"}
    answer = people.signed_in("sam").post(url("change", "design_dose", "CAUSTIC-PH"), typed | {field: value})
    assert words in " ".join(answer.context["form"].errors[field])
    assert queries.stated(book).design_dose_mg_l("CAUSTIC-PH", dt.datetime(2026, 4, 1, tzinfo=dt.UTC)) == 8


def test_a_new_limit_keeps_its_digits_and_who_is_told(book):
    typed = {
        "named_code": "raw-ph", "sample_point": "RAW", "parameter": "pH", "kind": "bound", "level": "action", "low": "6.50",
        "tell": "Regulator, water desk; 24", "source": "permit", "effective_from": "2026-03-02T07:00", "reason": "permit",
        "state": "yes",
    }  # fmt: skip
    answer = people.signed_in("sam").post(url("new", "limit"), typed)
    assert answer.status_code == 302, answer.context["form"].errors
    limit = next(item for item in queries.stated(book).limits(NOW) if item.code == "raw-ph")
    assert limit.keys == {"low": 6.5, "decimals": 2}
    assert limit.tell == ({"who": "Regulator, water desk", "within_hours": 24},)


def test_the_same_code_twice_is_refused(book):
    typed = {"named_code": "RAW", "stage": "raw", "effective_from": "2026-03-02T07:00", "reason": "x", "state": "yes"}
    answer = people.signed_in("sam").post(url("new", "sample_point"), typed)
    assert "stated already" in text(answer)
    answer = people.signed_in("sam").post(url("new", "sample_point"), typed | {"named_code": "HYPO-BULK"})
    assert "already" in text(answer)


def test_a_withdrawal(book):
    sam = people.signed_in("sam")
    typed = {"effective_from": "2026-03-02T07:00", "reason": "no longer asked for", "state": "yes"}
    typed["seen"] = sam.get(url("withdraw", "limit", "entry-ph")).context["form"]["seen"].value()
    assert sam.post(url("withdraw", "limit", "entry-ph"), typed).status_code == 302
    assert queries.stated(book).value("limit", "entry-ph", NOW) is None
    assert "withdrawn" in text(sam.get(url("subject", "limit", "entry-ph")))
    refused = sam.post(url("withdraw", "meter", "FT-TREATED"), typed)
    assert "no meter &#x27;FT-TREATED&#x27; is stated" in text(refused)


def upload(data):
    return SimpleUploadedFile("works.toml", data.encode(), "application/toml")


def test_a_file_is_looked_at_and_then_stated(book):
    sam = people.signed_in("sam")
    small = people.SMALL.read_text()
    changed = small.replace("demand_mg_per_L = 0.6", "demand_mg_per_L = 0.7")
    look = sam.post(url("file"), {"file": upload(changed), "reason": "jar test"})
    assert "1 setting would be stated" in text(look)
    before = models.Statement.objects.count()
    context = look.context
    done = sam.post(url("file"), {"text": context["text"], "from": context["from"], "why": context["why"]})
    assert done.status_code == 302
    assert models.Statement.objects.count() == before + 1
    assert queries.stated(book).dosing_point("HYPO-POST", NOW).need["demand_mg_per_L"] == 0.7


@pytest.mark.parametrize(
    ("data", "words"),
    [
        ('[works]\ncode = "OTHER"\nname = "x"\ntimezone = "UTC"\n', "describes the works OTHER"),
        ("[works", "not TOML"),
        ('[works]\ncode = "TST"\nname = "x"\ntimezone = "Mars/Base"\n', "Mars/Base"),
    ],
)
def test_a_wrong_file_says_why(book, data, words):
    answer = people.signed_in("sam").post(url("file"), {"file": upload(data)})
    assert words in text(answer)


def test_the_administrator_adds_somebody_and_the_password_works(book):
    adam = people.signed_in("adam")
    typed = {"username": "nils", "full_name": "Nils Nord", "role": "operator", "reason": "new on shift"}
    answer = adam.post(url("add_person"), typed)
    password = answer.context["password"]
    assert Person.objects.get(username="nils").check_password(password)
    assert access.member(queries.stated(book), "nils", NOW).role == "operator"
    assert "Nils Nord" in text(adam.get(url("people")))
    again = adam.post(url("new_password", "nils")).context["password"]
    assert again != password
    assert Person.objects.get(username="nils").check_password(again)
    adam.post(url("end_membership", "nils"), {"reason": "moved"})
    assert access.member(queries.stated(book), "nils", NOW) is None


def test_an_administrator_can_not_take_over_somebody_of_another_works(book):
    other = people.open_works(people.SMALL.read_text().replace('code = "TST"', 'code = "TWO"'))
    people.join(other, "mira")
    adam = people.signed_in("adam")
    adam.post(url("new_password", "mira"))
    assert people.person("mira").check_password(people.PASSWORD)
    assert "new password" not in text(adam.get(url("person", "mira"))).lower()


def test_nobody_locks_himself_out(book):
    adam = people.signed_in("adam")
    adam.post(url("end_membership", "adam"), {"reason": "by mistake"})
    adam.post(url("person", "adam"), {"role": "operator", "reason": "by mistake"})
    assert access.member(queries.stated(book), "adam", NOW).role == "administrator"


def test_the_first_file_of_a_new_works():
    person = people.person("rita")
    address = reverse("works:new_works")
    assert people.signed_in("rita").get(address).status_code == 403
    Person.objects.filter(pk=person.pk).update(is_superuser=True)
    answer = people.signed_in("rita").post(address, {"file": upload(people.SMALL.read_text())})
    assert answer.status_code == 302
    assert access.works_of("rita", NOW)[0].code == "TST"
    again = people.signed_in("rita").post(address, {"file": upload(people.SMALL.read_text())})
    assert "there is a works TST already" in text(again)
