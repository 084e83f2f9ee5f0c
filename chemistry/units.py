"""The one place where units are converted: spellings people type, and each parameter's own canonical unit.

Factors are exact fractions where law or definition makes them exact (1 lb = 0.453 592 37 kg, 1 US gal =
3.785 411 784 L, 1 imperial gal = 4.546 09 L, 1 in = 25.4 mm, 1 grain = 64.798 91 mg; NIST SP 811, from
memory, compared with `pint` in the tests). Hardness degrees: 1 °dH = 10 mg/L CaO, 1 °fH = 10 mg/L CaCO3, 1
°e = 1 grain CaCO3 per imperial gallon, 1 gr/gal = 1 grain CaCO3 per US gallon (definitions). Conversions
through molar masses use CIAAW 2021 and are marked inexact.
"""

from dataclasses import dataclass
from decimal import Context, Decimal, InvalidOperation, localcontext
from fractions import Fraction
from typing import Any

from chemistry import constants, errors
from chemistry.unit_tables import (
    ACCEPTED_UNITS,
    KEPT_UNITS,
    PARAMETERS,
    SAME_AS_CANONICAL,
    STATED_AS_CACO3,
    UNITS,
    Parameter,
    Unit,
)

Values = Any  # a float or a numpy array

_SIGNIFICANT_DIGITS = 12
_REMARK_PLAIN_HARDNESS = "mg/L without its basis: taken as CaCO3"
_REMARK_MPN = "most probable number, compared as a plate count"
_REMARK_FNU = "FNU compared as NTU"


class UnknownUnit(errors.ChemistryError):
    """A unit that isn't accepted here; ``accepted`` lists what is."""

    def __init__(self, unit: str, accepted: tuple[str, ...], what: str = ""):
        self.unit = unit
        self.accepted = accepted
        listed = ", ".join(name or "(empty)" for name in accepted)
        super().__init__(f"unit {unit!r} isn't accepted{f' for {what}' if what else ''}; accepted: {listed}")


class UnknownParameter(errors.ChemistryError):
    """A parameter without a canonical unit; pass ``canonical_unit`` for one the works defines itself."""


@dataclass(frozen=True)
class _Step:
    """value in canonical unit = value * factor + offset."""

    unit: str
    factor: Fraction
    offset: Fraction
    exact: bool
    remark: str = ""


def convert(value: Values, from_unit: str, to_unit: str) -> Values:
    """``value`` (float or array) in another unit of the same kind.

    Kinds: mass per volume, hardness as CaCO3 (mg/L as CaCO3, °dH, °fH, °e, gr/gal, meq/L), amount per
    volume, temperature, turbidity, conductance, length, volume, mass, flow, mass flow, time, counts,
    density, chlorine strength (trade %). Raises UnknownUnit for a spelling not in the table or for units of
    two kinds.
    """
    source, target = _unit(from_unit), _unit(to_unit)
    bridge = _bridge(source, target)
    if bridge is None:
        same = tuple(name for name, unit in UNITS.items() if unit.kind == target.kind)
        raise UnknownUnit(from_unit, same, f"a value in {to_unit}")
    if source == target:
        return value
    factor = source.factor * bridge / target.factor
    offset = (source.offset - target.offset) / target.factor if source.kind == target.kind else Fraction(0)
    return value * float(factor) + float(offset) if offset else value * float(factor)


def canonical(value: Values, unit: str, parameter: str, canonical_unit: str | None = None) -> Values:
    """(value, canonical unit) of a reading; float or array.

    Canonical: pH '' · mg/L · mg/L as CaCO3 for hardness and alkalinity · °C · NTU · uS/cm · m (but % of
    height stays %) · L · kg · h · m3/h · CFU/100mL. mmol/L of hardness counts CaCO3 (x 100.09), mmol/L and
    meq/L of alkalinity count H+ (x 50.04). Ammonia and nitrite are as N, sulfide as S, phosphate as PO4,
    permanganate as KMnO4, chlorine as Cl2. ``canonical_unit`` names the unit of a parameter the works
    defines itself. Raises UnknownUnit (with the accepted list) or UnknownParameter.
    """
    step = _step(unit, parameter, canonical_unit)
    if step.factor == 1 and not step.offset:
        return value, step.unit
    return value * float(step.factor) + float(step.offset), step.unit


def canonical_text(text: str, unit: str, parameter: str, canonical_unit: str | None = None) -> str:
    """The decimal text of a reading in its canonical unit, e.g. ``("62.50", "µg/L", "iron")`` -> ``"0.06250"``.

    Exact to the last digit, trailing zeros kept, when the factor is exact and ends; otherwise rounded half
    to even at 12 significant digits. Raises ChemistryError for text that isn't one plain decimal number.
    """
    try:
        number = Decimal(text.strip())
    except InvalidOperation:
        raise errors.ChemistryError(f"not a number: {text!r}") from None
    if not number.is_finite():
        raise errors.ChemistryError(f"not a finite number: {text!r}")
    step = _step(unit, parameter, canonical_unit)
    with localcontext(Context(prec=60)):
        if step.factor == 1 and not step.offset:
            return format(number, "f")
        if step.exact and _ends(step.factor) and _ends(step.offset):
            result = number * _decimal(step.factor) + _decimal(step.offset)
            return format(result, "f")
        exact = Fraction(number) * step.factor + step.offset
        result = Decimal(exact.numerator) / Decimal(exact.denominator)
        result = Context(prec=_SIGNIFICANT_DIGITS).plus(result)
        return format(result.normalize() + 0, "f")


def basis_remark(unit: str, parameter: str, canonical_unit: str | None = None) -> str:
    """What a person should be told about the unit taken, '' when nothing (a missing basis, FNU as NTU, MPN as CFU)."""
    return _step(unit, parameter, canonical_unit).remark


def canonical_unit_of(parameter: str) -> str:
    """The canonical unit of a built-in parameter. Raises UnknownParameter."""
    if parameter not in PARAMETERS:
        raise UnknownParameter(f"parameter {parameter!r} has no canonical unit; known: {', '.join(sorted(PARAMETERS))}")
    return PARAMETERS[parameter].unit


def volume_l(value: Values, unit: str) -> Values:
    """A volume in litres. Raises UnknownUnit for a unit that isn't a volume."""
    return convert(value, unit, "L")


def mass_kg(value: Values, unit: str) -> Values:
    """A mass in kilograms. Raises UnknownUnit for a unit that isn't a mass."""
    return convert(value, unit, "kg")


def kind_of(unit: str) -> str:
    """The kind of quantity a spelling stands for: 'volume', 'mass', 'length' ... Raises UnknownUnit."""
    return _unit(unit).kind


def caco3_from_mmol_l(amount_mmol_l: Values, equivalents_per_mol: float) -> Values:
    """mg/L as CaCO3 of an ion or molecule: mmol/L x equivalents per mol x 50.043 (definition)."""
    return amount_mmol_l * equivalents_per_mol * constants.CACO3_MG_MEQ


def fahrenheit_from_celsius(temperature_c: Values) -> Values:
    """°F from °C (definition)."""
    return temperature_c * 1.8 + 32.0


def _unit(name: str) -> Unit:
    unit = UNITS.get(_tidy(name))
    if unit is None:
        raise UnknownUnit(name, ACCEPTED_UNITS)
    return unit


def _tidy(name: str) -> str:
    # Two code points look like the micro sign and two like the degree sign; keyboards give either.
    return " ".join(name.split()).replace("\u03bc", "\u00b5").replace("\u00ba", "\u00b0")


def _bridge(source: Unit, target: Unit) -> Fraction | None:
    if source.kind == target.kind:
        return Fraction(1)
    meq_as_caco3 = Fraction(str(constants.CACO3_MG_MEQ))
    return {
        ("equivalents", "as CaCO3"): meq_as_caco3,
        ("as CaCO3", "equivalents"): 1 / meq_as_caco3,
    }.get((source.kind, target.kind))


def _step(unit: str, parameter: str, canonical_unit: str | None) -> _Step:
    name = _tidy(unit)
    if canonical_unit is not None:
        return _own_step(name, canonical_unit)
    if parameter not in PARAMETERS:
        canonical_unit_of(parameter)
    info = PARAMETERS[parameter]
    if name in KEPT_UNITS.get(parameter, ()):
        return _Step(name, Fraction(1), Fraction(0), True)
    if name in SAME_AS_CANONICAL.get(parameter, ()):
        return _Step(info.unit, Fraction(1), Fraction(0), True)
    if name not in ACCEPTED_UNITS:
        raise UnknownUnit(unit, ACCEPTED_UNITS, parameter)
    if info.or_unit and UNITS[name].kind == UNITS[info.or_unit].kind:
        info = Parameter(info.or_unit)
    factor, exact = _factor(UNITS[name], info)
    if factor is None:
        raise UnknownUnit(unit, accepted_for(parameter), parameter)
    target = UNITS[info.unit]
    offset = (UNITS[name].offset - target.offset) / target.factor if UNITS[name].offset else Fraction(0)
    return _Step(info.unit, factor, offset, exact, _remark(UNITS[name], name, info))


def _own_step(name: str, canonical_unit: str) -> _Step:
    if name == canonical_unit:
        return _Step(name, Fraction(1), Fraction(0), True)
    source, target = _unit(name), UNITS.get(_tidy(canonical_unit))
    bridge = _bridge(source, target) if target else None
    if target is None or bridge is None:
        raise UnknownUnit(name, (canonical_unit,))
    offset = (source.offset - target.offset) / target.factor if source.kind == target.kind else Fraction(0)
    exact = source.exact and target.exact and source.kind == target.kind
    return _Step(canonical_unit, source.factor * bridge / target.factor, offset, exact)


def accepted_for(parameter: str) -> tuple[str, ...]:
    """The accepted spellings that make sense for a built-in parameter."""
    info = PARAMETERS[parameter]
    other = UNITS[info.or_unit].kind if info.or_unit else None
    fitting = tuple(n for n in ACCEPTED_UNITS if _factor(UNITS[n], info)[0] is not None or UNITS[n].kind == other)
    return tuple(dict.fromkeys(KEPT_UNITS.get(parameter, ()) + SAME_AS_CANONICAL.get(parameter, ()) + fitting))


def _factor(unit: Unit, info: Parameter) -> tuple[Fraction | None, bool]:
    """Factor from a unit to a parameter's canonical unit, and whether it is exact by definition."""
    target = UNITS[info.unit]
    if unit.kind == target.kind:
        return unit.factor / target.factor, unit.exact and target.exact
    grams = Fraction(str(constants.molar_mass(info.formula))) if info.formula else None
    half_caco3 = Fraction(str(constants.CACO3_MG_MEQ))
    if target.kind == "as CaCO3":
        if unit.kind == "mass per volume":
            return unit.factor, unit.exact
        if unit.kind == "equivalents":
            return unit.factor * half_caco3, False
        if unit.kind == "amount per volume":
            return unit.factor * half_caco3 * info.charge, False
    if target.kind == "mass per volume" and grams is not None:
        if unit.kind == "amount per volume":
            return unit.factor * grams, False
        if unit.kind == "equivalents" and info.charge:
            return unit.factor * grams / info.charge, False
        if unit.kind == "as CaCO3" and info.formula in STATED_AS_CACO3:
            return unit.factor * grams / info.charge / half_caco3, False
    return None, False


def _remark(unit: Unit, name: str, info: Parameter) -> str:
    if UNITS[info.unit].kind == "as CaCO3" and unit.kind == "mass per volume":
        return _REMARK_PLAIN_HARDNESS
    if name == "MPN/100mL":
        return _REMARK_MPN
    return _REMARK_FNU if name == "FNU" else ""


def _ends(number: Fraction) -> bool:
    denominator = number.denominator
    for prime in (2, 5):
        while denominator % prime == 0:
            denominator //= prime
    return denominator == 1


def _decimal(number: Fraction) -> Decimal:
    return (Decimal(number.numerator) / Decimal(number.denominator)).normalize()
