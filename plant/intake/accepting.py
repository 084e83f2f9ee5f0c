"""Terms of a load that a supervisor may set aside with a reason: its age and its strength. Pure but for what is stated."""

from __future__ import annotations

import datetime as dt

from plant.stock import models
from plant.works.stated import Stated


def outside_terms(stated: Stated, delivery: models.Delivery, today: dt.date) -> list[str]:
    """What is not as stated; empty where the load is as it should be, or nothing is stated of it."""
    product = stated.value("product", delivery.product, delivery.taken_at) or {}
    found = []
    shelf_life = product.get("shelf_life_days")
    if shelf_life is not None and delivery.manufactured_on is not None:
        age = (today - delivery.manufactured_on).days
        if age > float(shelf_life):
            found.append(f"The lot is {age} days old; its shelf life is {float(shelf_life):g} days.")
    basis = delivery.strength_basis or product.get("strength_basis")
    if delivery.strength is not None and basis == product.get("strength_basis"):
        low, high = product.get("accepted_strength_low"), product.get("accepted_strength_high")
        words = str(basis).replace("_", " ")
        if low is not None and delivery.strength < float(low):
            found.append(f"The certificate says {delivery.strength:g} ({words}); at least {float(low):g} is accepted.")
        if high is not None and delivery.strength > float(high):
            found.append(f"The certificate says {delivery.strength:g} ({words}); at most {float(high):g} is accepted.")
    return found
