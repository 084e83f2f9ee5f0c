"""Molar masses and the few physical constants the package shares.

Source: CIAAW, Standard Atomic Weights 2021, abridged table; for elements that have an interval the single
conventional value is used (H, C, N, O, Mg, Si, S, Cl, Br, Li, B: conventional values from memory, equal to
those of the `periodictable` package, which the tests compare).
"""

import re
from functools import lru_cache
from typing import Any

from chemistry import errors

Values = Any  # a float or a numpy array

ATOMIC_WEIGHTS_G_MOL: dict[str, float] = {
    "H": 1.008, "Li": 6.94, "Be": 9.0121831, "B": 10.81, "C": 12.011, "N": 14.007, "O": 15.999,
    "F": 18.998403162, "Na": 22.98976928, "Mg": 24.305, "Al": 26.9815384, "Si": 28.085,
    "P": 30.973761998, "S": 32.06, "Cl": 35.45, "K": 39.0983, "Ca": 40.078, "Ti": 47.867, "V": 50.9415,
    "Cr": 51.9961, "Mn": 54.938043, "Fe": 55.845, "Co": 58.933194, "Ni": 58.6934, "Cu": 63.546,
    "Zn": 65.38, "As": 74.921595, "Se": 78.971, "Br": 79.904, "Sr": 87.62, "Zr": 91.224, "Mo": 95.95,
    "Ag": 107.8682, "Cd": 112.414, "Sn": 118.710, "Sb": 121.760, "I": 126.90447, "Ba": 137.327,
    "La": 138.90547, "Ce": 140.116, "Hg": 200.592, "Pb": 207.2,
}  # fmt: skip

GAS_CONSTANT_J_MOL_K = 8.314462618  # CODATA 2018, exact from the 2019 SI
ZERO_C_IN_K = 273.15

_TOKEN = re.compile(r"([A-Z][a-z]?)|(\()|(\))|(\d+(?:\.\d+)?)")
_PART = re.compile(r"^(\d*)(.+)$")
_LONGEST_FORMULA = 80


def composition(formula: str) -> dict[str, float]:
    """Atoms per formula unit, e.g. ``Al2(SO4)3.14H2O`` -> {"Al": 2, "S": 3, "O": 26, "H": 28}.

    Understands parentheses and hydrates written with ``.``, ``·`` or ``*``. Charges are not part of a
    formula here. Raises ChemistryError for anything else (unknown element, unbalanced parenthesis, empty
    text).
    """
    return dict(_composition(formula))


def is_formula(text: str) -> bool:
    """True when :func:`composition` can read the text."""
    try:
        _composition(text)
    except errors.ChemistryError:
        return False
    return True


def molar_mass(formula: str) -> float:
    """Molar mass in g/mol of a formula as read by :func:`composition`.

    Source: CIAAW 2021 (see the module). Valid for the elements of ATOMIC_WEIGHTS_G_MOL; others raise
    ChemistryError.
    """
    return sum(ATOMIC_WEIGHTS_G_MOL[element] * count for element, count in _composition(formula))


def kelvin(temperature_c: Values) -> Values:
    """Absolute temperature in K from °C; float or array."""
    return temperature_c + ZERO_C_IN_K


@lru_cache(maxsize=512)
def _composition(formula: str) -> tuple[tuple[str, float], ...]:
    if not isinstance(formula, str) or not formula.strip() or len(formula) > _LONGEST_FORMULA:
        raise errors.ChemistryError(f"not a chemical formula: {formula!r}")
    total: dict[str, float] = {}
    text = formula.replace(" ", "").replace("·", ".").replace("*", ".")
    for index, part in enumerate(text.split(".")):
        match = _PART.match(part)
        if match is None or (index == 0 and match.group(1)):
            raise errors.ChemistryError(f"not a chemical formula: {formula!r}")
        times = int(match.group(1) or 1)
        for element, count in _group(match.group(2), formula).items():
            total[element] = total.get(element, 0) + times * count
    return tuple(total.items())


def _group(text: str, formula: str) -> dict[str, float]:
    stack: list[dict[str, float]] = [{}]
    position = 0
    last: dict[str, float] | None = None  # what a following number multiplies
    while position < len(text):
        match = _TOKEN.match(text, position)
        if match is None:
            raise errors.ChemistryError(f"can't read {formula!r} from {text[position:]!r}")
        position = match.end()
        element, opens, closes, number = match.groups()
        if number is not None:
            if last is None:
                raise errors.ChemistryError(f"a number stands alone in {formula!r}")
            for key, count in last.items():
                stack[-1][key] += (float(number) - 1) * count
            last = None
        elif opens:
            stack.append({})
            last = None
        elif closes:
            if len(stack) == 1 or not stack[-1]:
                raise errors.ChemistryError(f"parentheses don't match in {formula!r}")
            last = stack.pop()
            for key, count in last.items():
                stack[-1][key] = stack[-1].get(key, 0) + count
        else:
            if element not in ATOMIC_WEIGHTS_G_MOL:
                raise errors.ChemistryError(f"unknown element {element!r} in {formula!r}")
            last = {element: 1}
            stack[-1][element] = stack[-1].get(element, 0) + 1
    if len(stack) != 1:
        raise errors.ChemistryError(f"parentheses don't match in {formula!r}")
    return stack[0]


CACO3_G_MOL = molar_mass("CaCO3")
CACO3_MG_MEQ = CACO3_G_MOL / 2  # equivalent weight, Standard Methods 2320 B (definition)
