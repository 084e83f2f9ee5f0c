"""The OpenAPI document says what is there: every address, method, scope; it is valid; answers keep to it."""

from __future__ import annotations

import re

import jsonschema_rs
import pytest
from schemathesis.specs.openapi import definitions

from plant.api import document, urls
from tests import people
from tests.api.machines import batch, reading

PATHS = document.DOCUMENT["paths"]
METHODS = ("get", "put", "post", "patch", "delete")


def validator(name: str) -> jsonschema_rs.Draft202012Validator:
    return jsonschema_rs.Draft202012Validator(
        {"$ref": f"#/components/schemas/{name}", "components": document.DOCUMENT["components"]}
    )


def test_every_address_is_in_it_with_its_method_and_scope():
    here = {}
    for one in urls.urlpatterns:
        if hasattr(one.callback, "scope"):
            path = "/" + re.sub(r"<\w+:(\w+)>", r"{\1}", str(one.pattern)).replace("{ident}", "{batch}")
            here[path] = ([method.lower() for method in one.callback.methods], one.callback.scope)
    written = {}
    for path, item in PATHS.items():
        methods = [method for method in METHODS if method in item]
        scopes = [found[1] if (found := re.fullmatch(r"Scope: (\S+)\.", item[m]["description"])) else "" for m in methods]
        written[path] = (methods, *scopes)
    assert here == written


def test_every_place_in_an_address_is_described():
    for path, item in PATHS.items():
        assert {one["name"] for one in item["parameters"]} == set(re.findall(r"{(\w+)}", path))


def test_its_schemas_are_json_schema():
    for name, schema in document.DOCUMENT["components"]["schemas"].items():
        assert jsonschema_rs.meta.is_valid(schema | {"$schema": "https://json-schema.org/draft/2020-12/schema"}), name


def test_it_is_an_openapi_3_1_document():
    """Against the specification's own schema, as Schemathesis carries it."""
    assert [str(problem) for problem in definitions.OPENAPI_31_VALIDATOR.iter_errors(document.DOCUMENT)] == []
    assert not definitions.OPENAPI_31_VALIDATOR.is_valid(document.DOCUMENT | {"info": {"title": "no version"}})


def test_it_is_handed_out_to_anybody_and_tells_nothing_of_a_works(client, book):
    answer = client.get("/api/openapi.json")
    assert answer.status_code == 200
    assert answer.json()["openapi"] == "3.1.0"
    assert "TST" not in answer.content.decode()


@pytest.mark.parametrize("rows", [[reading()], [reading(), reading(site="X")], [reading(site="X")], [1]])
def test_the_answer_to_a_batch_keeps_to_it(machine, rows):
    answer = machine.send(batch(*rows))
    validator("BatchAnswer" if answer.status_code == 201 else "Problem").validate(answer.json())


def test_what_is_taken_is_what_it_allows():
    batch_of = validator("Batch")
    assert batch_of.is_valid(batch(reading(value=0.5), reading(value=None)))
    for wrong in (batch(), batch(reading(replaces="yes")), batch(reading(qualifier="~")), batch({"site": "ENTRY"})):
        assert not batch_of.is_valid(wrong)


def test_people_read_the_same(book):
    page = people.signed_in("adam").get("/api/").content.decode()
    for path, item in PATHS.items():
        assert path in page
        assert next(item[method]["summary"] for method in METHODS if method in item) in page
    for name in document.DOCUMENT["components"]["schemas"]["Reading"]["properties"]:
        assert f"<code>{name}</code>" in page
