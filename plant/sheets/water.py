"""Sheets on the water itself: its balance with calcium carbonate, its pH after a dose, blending, hardness."""

from __future__ import annotations

from chemistry import carbonate, hardness, units
from plant.sheets.sheet import WATER, Answer, Field, Line, Result, Sheet, Values

GROUP = "The water"
CLOSED = "Closed to the air. Aeration, biology and precipitation move the pH: confirm at the tap and with a jar test."
SOLVER = Line(
    "Ion pairs and activities are solved together with pH, alkalinity and carbon",
    "charge and mass balance of the carbonate system",
    "PLUMMER-BUSENBERG-1982",
)


def water_of(values: Values, suffix: str = "") -> carbonate.Water:
    """The water as entered; what is left empty counts as absent."""

    def ion(name: str) -> float:
        return float(values.get(name + suffix) or 0.0)

    return carbonate.Water(
        temperature_c=values["temperature" + suffix],
        ph=values["ph" + suffix],
        alkalinity_mg_l_caco3=values["alkalinity" + suffix],
        calcium_mg_l=ion("calcium"),
        magnesium_mg_l=ion("magnesium"),
        sodium_mg_l=ion("sodium"),
        chloride_mg_l=ion("chloride"),
        sulfate_mg_l=ion("sulfate"),
    )


def balance(values: Values) -> Answer:
    water = water_of(values)
    found = carbonate.indices(water)
    potential = carbonate.precipitation_potential(water)
    leaning = "leaves scale" if potential.ccpp_mg_l > 0 else "dissolves calcium carbonate"
    return Answer(
        (
            Result("Saturation index", found.si_calcite, "", 2, large=True),
            Result("Precipitation potential", potential.ccpp_mg_l, "mg/L as CaCO3", 1, large=True),
            Result("pH of saturation", found.ph_s, "", 2),
            Result("Ryznar index", found.ryznar, "", 2),
            Result("pH when in balance", potential.ph_at_balance, "", 2),
            Result("At this temperature the water", leaning),
        ),
        (
            SOLVER,
            Line("Saturation index", f"log(IAP ÷ Ksp) = {found.si_calcite:.3f}", "PLUMMER-BUSENBERG-1982"),
            Line(
                "Precipitation potential", "calcium carbonate leaves or enters until the index is 0, acidity staying", "SM-2330"
            ),
            Line("Ryznar", f"2 × {found.ph_s:.2f} − {found.ph:.2f} = {found.ryznar:.2f}", "RYZNAR-1944"),
        ),
        ("An index is no forecast of corrosion by itself: metals, oxygen and inhibitors matter too.",),
    )


CHEMICALS = (
    "NaOH", "Ca(OH)2", "Na2CO3", "NaHCO3", "CO2", "H2SO4", "HCl", "NaOCl", "Cl2", "Al2(SO4)3", "FeCl3", "Fe2(SO4)3", "H2SiF6",
)  # fmt: skip
CHEMICAL = Field("chemical", "Chemical", choices=tuple((name, name) for name in CHEMICALS), start="NaOH")


def ph_after(values: Values) -> Answer:
    water = water_of(values)
    chemical, dose = str(values["chemical"]), float(values["dose"])
    after = carbonate.ph_after_dose(water, chemical, dose)
    return Answer(
        (Result("pH after the dose", after, "", 2, large=True), Result("Change", after - values["ph"], "", 2)),
        (
            SOLVER,
            Line(f"{dose:g} mg/L of {chemical} added", "alkalinity, carbon and ions shift by its equivalents", "definition"),
        ),
        (CLOSED, "Doses are of the pure compound, not of the product."),
    )


def dose_for(values: Values) -> Answer:
    water = water_of(values)
    chemical, target = str(values["chemical"]), float(values["target"])
    dose = carbonate.dose_for_target_ph(water, chemical, target)
    return Answer(
        (Result(f"{chemical}, pure", dose, "mg/L", 2, large=True),),
        (SOLVER, Line(f"Dose that brings the closed water to pH {target:g}", "Alk(pH, DIC) = Alk + n × dose", "definition")),
        (CLOSED, "Caustic and acids burn: face shield, gloves, never water into acid."),
    )


def blending(values: Values) -> Answer:
    one, other = water_of(values), water_of(values, "_2")
    mixed = carbonate.blend(one, other, float(values["share"]) / 100)
    found = carbonate.speciate(mixed)
    index = carbonate.indices(mixed).si_calcite
    return Answer(
        (
            Result("pH of the blend", found.ph, "", 2, large=True),
            Result("Saturation index", index, "", 2),
            Result("Alkalinity", found.alkalinity_meq_l * 50.043, "mg/L as CaCO3", 1),
        ),
        (
            Line(
                "Alkalinity, carbon and ions mix by volume; the pH does not",
                "solved anew for the blend",
                "PLUMMER-BUSENBERG-1982",
            ),
        ),
        (CLOSED,),
    )


def hardness_parts(values: Values) -> Answer:
    calcium = hardness.calcium_hardness_mg_l_caco3(values["calcium"])
    magnesium = hardness.magnesium_hardness_mg_l_caco3(values["magnesium"])
    parts = hardness.parts(calcium, magnesium, values["alkalinity"])
    total = calcium + magnesium
    degrees = units.canonical(1.0, "°dH", "hardness")[0]
    return Answer(
        (
            Result("Total hardness", total, "mg/L as CaCO3", 1, large=True),
            Result("Carbonate (temporary) hardness", parts.carbonate, "mg/L as CaCO3", 1),
            Result("Non-carbonate (permanent) hardness", total - parts.carbonate, "mg/L as CaCO3", 1),
            Result("In German degrees", total / degrees, "°dH", 2),
            Result("In French degrees", total / units.canonical(1.0, "°fH", "hardness")[0], "°fH", 2),
            Result("In English degrees", total / units.canonical(1.0, "°e", "hardness")[0], "°e", 2),
            Result("In grains per US gallon", total / units.canonical(1.0, "gr/gal", "hardness")[0], "gr/gal", 2),
        ),
        (
            Line("Total hardness", f"2.497 × {values['calcium']:g} + 4.118 × {values['magnesium']:g} = {total:.1f}", "SM-2340"),
            Line(
                "Carbonate hardness is the lesser of hardness and alkalinity",
                f"{parts.carbonate:.1f} mg/L as CaCO3",
                "DAVIS-2010",
            ),
        ),
    )


SHEETS = (
    Sheet("balance", "Calcium carbonate balance", GROUP, "Saturation index, precipitation potential and Ryznar index of a water.", WATER, balance),
    Sheet("ph-after-dose", "pH after a dose", GROUP, "What the pH becomes when a chemical is added.",
          (*WATER, CHEMICAL, Field("dose", "Dose, pure", "mg/L", 10)), ph_after),
    Sheet("dose-for-ph", "Dose for a pH", GROUP, "How much of a chemical brings the water to a pH.",
          (*WATER, CHEMICAL, Field("target", "pH wanted", "", 8.2)), dose_for),
    Sheet("blending", "Blending two waters", GROUP, "pH and balance of a mixture.",
          (*WATER, *(Field(field.name + "_2", f"Other water: {field.label.lower() if field.label != 'pH' else 'pH'}", field.unit, field.start,
                           optional=field.optional) for field in WATER),
           Field("share", "Share of the first water", "%", 50)), blending),
    Sheet("hardness", "Hardness and its parts", GROUP, "Total, carbonate and non-carbonate hardness, in every degree.",
          (WATER[2], WATER[3], WATER[4]), hardness_parts),
)  # fmt: skip
