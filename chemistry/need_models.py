"""The need models that are plain arithmetic: demand, salt, quench, oxidise, sequestrant, curve, fluoride.

Each takes (settings, readings, product) and returns a Working, or raises ChemistryError (MissingReading for
a reading).
"""

from itertools import pairwise

from chemistry import constants, errors, need_parts, oxidants, products
from chemistry.need_parts import Product, Readings, Settings, Step, Working

DEMAND = "demand_mg_per_L"  # the caller's flow-weighted mean of dose less residual
_CHLORINE = ("Cl2", "NaOCl", "Ca(OCl)2")
_FE_MN_LIMIT_MG_L = 1.0  # polyphosphate suits Fe + Mn up to this; WIS-NR-811.56


def oxidant_demand(settings: Settings, readings: Readings, product: Product) -> Working:
    """Dose = demand + target residual, both in the residual's basis (chlorine as Cl2, peroxide as H2O2); MD0160."""
    target = need_parts.setting(settings, "target_residual_mg_per_L", 0.0)
    uses: tuple[str, ...] = ()
    if settings.get("demand_from") == "last_7_days":
        demand, uses = need_parts.reading(readings, DEMAND), (DEMAND,)
        words = "flow-weighted mean of dose less residual over the seven operating days before"
    else:
        demand = need_parts.setting(settings, DEMAND)
        words = "demand as stated by the works"
    dose = oxidants.dose_for_residual_mg_l(demand, target)
    return Working(
        dose,
        residual_basis(product),
        uses=uses,
        steps=[
            Step(words, "D", demand, "mg/L", "definition"),
            Step("dose for the residual wanted", "D + R", dose, "mg/L", "MD0160"),
        ],
        cautions=["demand belongs to the contact time and sample point where the residual was read"],
    )


def residual_basis(product: Product) -> str:
    """The formula a product's residual is read as: Cl2, H2O2, O3, KMnO4 ...; '' where it has none of its own.

    A demand is dose less residual in this basis: restate the dose with :func:`dose_as_residual_mg_l` first.
    """
    chemical = str(product["chemical"])
    if chemical in _CHLORINE:
        return "Cl2"
    return chemical if chemical in oxidants.OXIDANT_ELECTRONS else ""


def dose_as_residual_mg_l(dose_mg_l: float, product: Product) -> float:
    """A dose (or mass) in the product's dose basis restated as its residual is read, e.g. product as mg/L Cl2."""
    formula = residual_basis(product)
    return dose_mg_l / float(products.dose_in_basis_mg_l(1.0, formula, product)) if formula else dose_mg_l


def ion_exchange_salt(settings: Settings, readings: Readings, product: Product) -> Working:
    """Salt per litre of blended water: hardness removed x salt per regeneration / capacity per regeneration."""
    resin_m3 = need_parts.setting(settings, "resin_m3")
    capacity = need_parts.setting(settings, "capacity_kg_CaCO3_per_m3")
    salt = need_parts.setting(settings, "salt_kg_per_m3")
    target = need_parts.setting(settings, "target_hardness_mg_per_L_CaCO3")
    if min(resin_m3, capacity, salt) <= 0:
        raise errors.ChemistryError("resin, capacity and salt must be above 0")
    hardness = need_parts.reading(readings, "hardness")
    removed = max(hardness - target, 0.0)
    per_kg = salt / capacity
    steps = [
        Step("hardness to remove from the blended water", "TH - target", removed, "mg/L as CaCO3", "definition"),
        Step("salt per kg of hardness", "salt / capacity", per_kg, "kg/kg", "definition"),
    ]
    if removed > 0:
        cycle_ml = resin_m3 * capacity / removed
        steps.append(Step("blended water between regenerations", "V q / (TH - target)", cycle_ml, "ML", "definition"))
    dose = removed * per_kg
    steps.append(Step("salt per volume of blended water", "(TH - target) salt / q", dose, "mg/L", "definition"))
    floor = 2 * constants.molar_mass("NaCl") / constants.CACO3_G_MOL
    cautions = []
    if per_kg < floor:
        cautions.append(f"salt below the stoichiometric {floor:.2f} kg/kg: check salt and capacity")
    return Working(dose, "NaCl", ("hardness",), steps, cautions)


def quench(settings: Settings, readings: Readings, product: Product) -> Working:
    """Dose that brings chlorine or peroxide down to a target, by stoichiometry."""
    of, target = settings.get("of"), need_parts.setting(settings, "target_mg_per_L", 0.0)
    chemical = product["chemical"]
    if of == "chlorine":
        name = "free_chlorine"
        if not need_parts.has(readings, name) and need_parts.has(readings, "total_chlorine"):
            name = "total_chlorine"
        ratio, formula = float(oxidants.dechlorination_mg_l(chemical, 1.0)), chemical
    elif of == "peroxide":
        name = "hydrogen_peroxide"
        per_chlorine = constants.molar_mass("Cl2") / constants.molar_mass("H2O2")
        if chemical in _CHLORINE:
            ratio, formula = per_chlorine, "Cl2"
        elif chemical != "H2O2" and chemical in oxidants.DECHLORINATING:
            ratio, formula = per_chlorine * float(oxidants.dechlorination_mg_l(chemical, 1.0)), chemical
        else:
            raise errors.ChemistryError(f"{chemical} isn't known to quench peroxide")
    else:
        raise errors.ChemistryError(f"quench needs of = chlorine or peroxide, not {of!r}")
    value = need_parts.reading(readings, name)
    excess = max(value - target, 0.0)
    dose = excess * ratio
    cautions = ["stoichiometric: practice needs a jar test; an overdose leaves the quencher in the water"]
    if of == "peroxide" or chemical == "H2O2":
        cautions.append("hydrogen peroxide makes a DPD chlorine reading falsely high")
    return Working(
        dose,
        formula,
        (name,),
        [
            Step(f"{of} to take out", "C - target", excess, "mg/L", "definition"),
            Step(f"{formula} per mg of {of}", "M/n over M/n", ratio, "mg/mg", "CIAAW-2021"),
            Step("dose", "(C - target) r", dose, "mg/L", "definition"),
        ],
        cautions,
    )


def oxidise(settings: Settings, readings: Readings, product: Product) -> Working:
    """Stoichiometric oxidant for iron, manganese and sulfide.

    A setting ``true`` takes the stoichiometric ratio, a number is the works' own mg per mg, ``false``
    leaves it out; with none of the three stated, whatever is read counts. Sulfide (as S) goes to sulfate
    with chlorine and to sulfur with the others unless ``sulfide_to`` says otherwise.
    """
    chemical = product["chemical"]
    oxidant = "Cl2" if chemical in _CHLORINE else chemical
    wanted = {key: settings[key] for key in ("iron", "manganese", "sulfide") if key in settings}
    if not wanted:
        wanted = {key: True for key in ("iron", "manganese", "sulfide") if need_parts.has(readings, key)}
    wanted = {key: value for key, value in wanted.items() if value is not False}
    if not wanted:
        raise need_parts.MissingReading("iron", "manganese", "sulfide")
    need_parts.require_readings(readings, *wanted)
    sulfide_to = settings.get("sulfide_to", "sulfate" if oxidant == "Cl2" else "sulfur")
    dose, steps = 0.0, []
    for name, share in wanted.items():
        reductant = f"sulfide_to_{sulfide_to}" if name == "sulfide" else name
        if share is True:
            ratio, source = oxidants.oxidant_per_reductant_mg_mg(oxidant, reductant), "CIAAW-2021"
        else:
            ratio, source = need_parts.setting(wanted, name), "common-practice"
        part = ratio * need_parts.reading(readings, name)
        dose += part
        steps.append(Step(f"{oxidant} for {name}", f"{ratio:.4g} × {name}", part, "mg/L", source))
    steps.append(Step("dose", "Σ", dose, "mg/L", "definition"))
    return Working(
        dose,
        oxidant,
        tuple(wanted),
        steps,
        ["dissolved part only; organics and slow manganese need more: jar test"],
    )


def sequestrant(settings: Settings, readings: Readings, product: Product) -> Working:
    """Base dose plus the works' own mg per mg of iron and manganese, in the product's dose basis (common practice)."""
    base = need_parts.setting(settings, "base_mg_per_L", 0.0)
    dose, uses = base, []
    steps = [Step("base dose as stated", "b", base, "mg/L", "common-practice")]
    for key, name in (("mg_per_mg_iron", "iron"), ("mg_per_mg_manganese", "manganese")):
        ratio = need_parts.setting(settings, key, 0.0)
        if ratio:
            part = ratio * need_parts.reading(readings, name)
            dose += part
            uses.append(name)
            steps.append(Step(f"for {name}", f"{ratio:g} × {name}", part, "mg/L", "common-practice"))
    steps.append(Step("dose", "Σ", dose, "mg/L", "common-practice"))
    cautions = ["polyphosphate reverts with time and heat, is weaker on manganese, and goes in before any oxidant"]
    held = sum(float(readings[name]) for name in ("iron", "manganese") if need_parts.has(readings, name))
    if held > _FE_MN_LIMIT_MG_L:
        cautions.append("iron + manganese above 1.0 mg/L: beyond what polyphosphate holds (Wis. NR 811.56)")
    return Working(dose, "", tuple(uses), steps, cautions)


def curve(settings: Settings, readings: Readings, product: Product) -> Working:
    """The works' own curve: straight lines between its points; outside them there is no answer."""
    name = settings.get("parameter")
    points = curve_points(settings.get("points"))
    value = need_parts.reading(readings, str(name))
    errors.require(str(name), value, "", points[0][0], points[-1][0], "the works' own curve")
    for (x0, y0), (x1, y1) in pairwise(points):
        if value <= x1:
            dose = y0 + (y1 - y0) * (value - x0) / (x1 - x0)
            break
    words = f"dose read off the works' curve at {name} {value:g}"
    return Working(dose, "", (str(name),), [Step(words, "straight line", dose, "mg/L", "common-practice")])


def curve_points(points: object) -> list[tuple[float, float]]:
    """A curve's points as pairs of floats; ChemistryError unless two or more, x rising, doses 0 or more."""
    try:
        pairs = [(float(x), float(y)) for x, y in points]  # type: ignore[attr-defined]
    except (TypeError, ValueError):
        raise errors.ChemistryError("points must be a list of [x, mg/L] pairs") from None
    rising = all(a[0] < b[0] for a, b in pairwise(pairs))
    if len(pairs) < 2 or not rising or any(not 0 <= y < float("inf") for _, y in pairs):
        raise errors.ChemistryError("a curve needs two or more points, x rising, doses 0 or more")
    return pairs


def fluoride(settings: Settings, readings: Readings, product: Product) -> Working:
    """Fluoride to add = target - natural, carried by the product's own fluoride content."""
    target = need_parts.setting(settings, "target_mg_per_L")
    natural = need_parts.reading(readings, "fluoride")
    added = max(target - natural, 0.0)
    products.fraction_of_product(product, "F")  # refuses a product without fluoride
    return Working(
        added,
        "F",
        ("fluoride",),
        [Step("fluoride to add", "target - natural", added, "mg/L as F", "AWWA-M4")],
        ["read the natural fluoride before the dosing point; day tank or drum on a scale"],
    )
