"""What a need model gives back and how it reads its inputs."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from math import isfinite
from typing import Any, NamedTuple

from chemistry import errors, products, uncertainty

# Standard uncertainty of one reading by the usual works method: (absolute, share of the value). Common
# practice, no source; the caller may pass better ones.
READING_SD: dict[str, tuple[float, float]] = {
    "pH": (0.05, 0.0),
    "temperature": (0.5, 0.0),
    "hardness": (1.0, 0.03),
    "calcium_hardness": (1.0, 0.03),
    "magnesium_hardness": (1.0, 0.05),
    "alkalinity": (1.0, 0.03),
    "free_chlorine": (0.02, 0.05),
    "total_chlorine": (0.02, 0.05),
    "hydrogen_peroxide": (0.05, 0.05),
    "fluoride": (0.02, 0.05),
}
OTHER_READING_SD = (0.0, 0.05)


class Step(NamedTuple):
    """One line of the working: words, formula, value, unit and the key of its source in `chemistry.sources`."""

    words: str
    formula: str
    value: float
    unit: str
    source: str


@dataclass(frozen=True)
class Need:
    """The dose a water needs, in the product's dose basis, or why there is none.

    ``dose_mg_l`` and ``sd_mg_l`` (standard uncertainty) are None together with a ``reason``; ``uses`` names
    the readings the result rests on, ``missing`` those it lacks; ``cautions`` are for people. Advice to a
    licensed person.
    """

    dose_mg_l: float | None
    sd_mg_l: float | None
    uses: tuple[str, ...] = ()
    missing: tuple[str, ...] = ()
    reason: str = ""
    steps: tuple[Step, ...] = ()
    cautions: tuple[str, ...] = ()


@dataclass
class Working:
    """A model's answer while it is being worked out: mg/L of ``formula`` ('' when already in the dose basis)."""

    dose_mg_l: float
    formula: str = ""
    uses: tuple[str, ...] = ()
    steps: list[Step] = field(default_factory=list)
    cautions: list[str] = field(default_factory=list)


class MissingReading(errors.ChemistryError):
    """Readings a model can't do without; ``names`` lists them."""

    def __init__(self, *names: str):
        self.names = names
        super().__init__(f"no reading of {', '.join(names)}")


Readings = Mapping[str, float]
Settings = Mapping[str, Any]
Product = Mapping[str, Any]
Model = Callable[[Settings, Readings, Product], Working]


def reading(readings: Readings, name: str) -> float:
    """One reading as a float; MissingReading when it is absent or not a finite number."""
    if not has(readings, name):
        raise MissingReading(name)
    return float(readings[name])


def has(readings: Readings, name: str) -> bool:
    """True when a finite reading is there."""
    value = readings.get(name)
    return value is not None and not isinstance(value, bool) and isfinite(value)


def require_readings(readings: Readings, *names: str) -> None:
    """Raise one MissingReading that lists every name lacking."""
    lacking = tuple(name for name in names if not has(readings, name))
    if lacking:
        raise MissingReading(*lacking)


def setting(settings: Settings, key: str, default: float | None = None) -> float:
    """A numeric setting; ChemistryError when it is absent without a default or isn't a number."""
    value = settings.get(key, default)
    if value is None or isinstance(value, bool) or not isinstance(value, int | float) or not isfinite(value):
        raise errors.ChemistryError(f"the need model wants {key} as a number, not {value!r}")
    return float(value)


def solve(model: Model, settings: Settings, readings: Readings, product: Product, sds: Mapping[str, float] | None) -> Need:
    """Run a model, state its dose in the product's basis and propagate the readings' uncertainties through it."""
    try:
        working = model(settings, readings, product)
        dose = in_basis(working, product)
    except MissingReading as lack:
        return Need(None, None, missing=lack.names, reason=str(lack))
    except errors.ChemistryError as refusal:
        return Need(None, None, reason=str(refusal))
    steps = list(working.steps)
    if working.formula and abs(dose - working.dose_mg_l) > 1e-12 * abs(dose):
        basis = product["dose_basis"]
        words = f"stated in the product's dose basis ({basis})"
        steps.append(Step(words, f"mg/L {working.formula} → mg/L {basis}", dose, "mg/L", "CIAAW-2021"))
    sd = _sd(model, settings, readings, product, working, sds or {}, dose)
    return Need(dose, sd, uses=working.uses, steps=tuple(steps), cautions=tuple(working.cautions))


def in_basis(working: Working, product: Product) -> float:
    """The working's dose in the product's own dose basis."""
    if not working.formula:
        return float(working.dose_mg_l)
    return float(products.dose_in_basis_mg_l(working.dose_mg_l, working.formula, product))


def reading_sd(name: str, value: float, sds: Mapping[str, float]) -> float:
    """Standard uncertainty of a reading: the caller's, else the usual one of its method."""
    if name in sds:
        return sds[name]
    absolute, share = READING_SD.get(name, OTHER_READING_SD)
    return float((absolute**2 + (share * value) ** 2) ** 0.5)


def _sd(
    model: Model,
    settings: Settings,
    readings: Readings,
    product: Product,
    working: Working,
    sds: Mapping[str, float],
    dose: float,
) -> float | None:
    def dose_of(**shifted: float) -> float:
        return in_basis(model(settings, {**readings, **shifted}, product), product)

    values = {name: float(readings[name]) for name in working.uses}
    try:
        from_readings = uncertainty.of_function(
            dose_of, values, {name: reading_sd(name, value, sds) for name, value in values.items()}
        )
    except errors.ChemistryError:
        return None
    if working.formula and product.get("dose_basis") == "product":
        strength = float(product.get("strength_sd_pct") or 0.0) / 100.0
        return float(uncertainty.of_sum([from_readings, dose * strength]))
    return float(from_readings)
