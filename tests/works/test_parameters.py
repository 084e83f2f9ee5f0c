"""What can be read at a works, in which unit."""

import pytest

from chemistry import needs, units
from plant.works import kinds, parameters, queries
from tests import people


@pytest.mark.parametrize("name", sorted(parameters.PARAMETERS))
def test_units_are_those_of_the_chemistry(name):
    assert parameters.PARAMETERS[name].unit == units.canonical_unit_of(name)


@pytest.mark.parametrize("name", sorted(parameters.PARAMETERS))
def test_what_is_usual_is_possible(name):
    parameter = parameters.PARAMETERS[name]
    for bound in (parameter.usual_low, parameter.usual_high):
        assert bound is None or parameter.possible(bound)


def test_a_lost_decimal_point_is_not_possible():
    assert not parameters.PARAMETERS["pH"].possible(740)
    assert parameters.PARAMETERS["pH"].possible(12.4)
    assert not parameters.PARAMETERS["pH"].usual(12.4)
    assert parameters.PARAMETERS["pH"].usual(7.4)


@pytest.mark.django_db
def test_the_works_own_parameter_and_units_at_a_site():
    stated = queries.stated(people.small_works())
    known = parameters.known(stated, people.OPENED)
    assert known["tannin"].label == "Tannin"
    assert parameters.own_unit(stated, people.OPENED, "tannin") == "mg/L"
    assert parameters.own_unit(stated, people.OPENED, "pH") is None
    assert parameters.unit_at(stated, people.OPENED, "FT-TREATED", "totaliser") == "m3"
    assert parameters.unit_at(stated, people.OPENED, "HYPO-BULK", "strength") == "g/L"
    assert parameters.unit_at(stated, people.OPENED, "NAOH-BULK", "strength") == "%"
    assert parameters.unit_at(stated, people.OPENED, "ENTRY", "hardness") == "mg/L as CaCO3"


@pytest.mark.parametrize("model", sorted(kinds.NEED_MODELS))
def test_need_models_take_the_keys_the_chemistry_understands(model):
    stated = {key.name for key in kinds.NEED_MODELS[model]}
    understood = needs.model_keys(model)
    assert stated | {"model", "max_age_hours"} == understood.allowed
    assert {key.name for key in kinds.NEED_MODELS[model] if key.required} == understood.required - {"model"}
