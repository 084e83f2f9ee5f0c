"""A number in the database says its unit, in its name or in a field beside it."""

import re

from django.apps import apps
from django.conf import settings
from django.db import models

# What may end the name of a measured number. Each is a unit, or says that there is none.
UNIT = re.compile(
    r"_(mg_l(_caco3)?|g_l|kg|kg_l|kg_per_l|l|ml|ml_d|m|m3|m3_h|mm|pct|c|celsius|h|hours|min|minutes|s|days|d"
    r"|ntu|ratio|factor|sd|at)$"
)
# Numbers whose unit stands in the field named here, on the same row.
UNIT_BESIDE = {"value": "unit", "quantity": "unit", "strength": "strength_basis", "cost": "currency"}


def test_every_measured_number_names_its_unit():
    unnamed = []
    for app in settings.PLANT_APPS:
        for model in apps.get_app_config(app.rpartition(".")[2]).get_models():
            names = {field.name for field in model._meta.get_fields()}
            for field in model._meta.get_fields():
                if not isinstance(field, models.FloatField | models.DecimalField) or UNIT.search(field.name):
                    continue
                if UNIT_BESIDE.get(field.name) not in names:
                    unnamed.append(f"{model._meta.label}.{field.name}")
    assert unnamed == []
