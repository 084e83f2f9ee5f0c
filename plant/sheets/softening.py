"""Sheets on softening: lime and soda by stoichiometry and by equilibrium, ion exchange, sequestration."""

from __future__ import annotations

from chemistry import carbonate, coagulants, ion_exchange, sequestration, softening
from chemistry import hardness as hardnesses
from plant.sheets.sheet import WATER, Answer, Field, Line, Result, Sheet, Values
from plant.sheets.water import SOLVER, water_of

GROUP = "Softening and metals"
LIME = (
    "Quicklime and hydrated lime burn and blind: goggles, gloves, eye wash at hand; slakers run hot and can boil over.",
    "Stoichiometric: the pH of the softened water and a jar test decide.",
)
YES_NO = (("no", "no"), ("yes", "yes"))


def lime_soda(values: Values) -> Answer:
    water = water_of(values)
    calcium = hardnesses.calcium_hardness_mg_l_caco3(values["calcium"])
    magnesium = hardnesses.magnesium_hardness_mg_l_caco3(values["magnesium"])
    co2 = carbonate.co2_mg_l(values["temperature"], values["ph"], values["alkalinity"])
    remove = values["remove_magnesium"] == "yes"
    dose = softening.lime_soda_dose(
        calcium_hardness_mg_l_caco3=calcium,
        magnesium_hardness_mg_l_caco3=magnesium,
        alkalinity_mg_l_caco3=values["alkalinity"],
        co2_mg_l=co2,
        target_hardness_mg_l_caco3=values["target"],
        remove_magnesium=remove,
        excess_mg_l_caco3=values["excess"] if remove else 0.0,
    )
    after = softening.soften(water, lime_ca_oh_2_mg_l=dose.lime_ca_oh_2_mg_l, soda_na2co3_mg_l=dose.soda_na2co3_mg_l)
    back = softening.single_stage(after.water, 8.5) if after.ph > 8.5 else None
    total_after = after.calcium_hardness_mg_l_caco3 + after.magnesium_hardness_mg_l_caco3
    results = [
        Result("Lime, as Ca(OH)2", dose.lime_ca_oh_2_mg_l, "mg/L", 1, large=True),
        Result("Soda ash, as Na2CO3", dose.soda_na2co3_mg_l, "mg/L", 1, large=True),
        Result("Lime, as CaO", dose.lime_cao_mg_l, "mg/L", 1),
        Result("Dry sludge", dose.solids_mg_l, "mg/L = kg/ML", 0),
        Result("Hardness left, by stoichiometry", dose.hardness_after_mg_l_caco3, "mg/L as CaCO3", 0),
        Result("Hardness left, at equilibrium", total_after, "mg/L as CaCO3", 0),
        Result("pH of the softened water, at equilibrium", after.ph, "", 2),
    ]
    if back is not None:
        results.append(Result("CO2 to bring it back to pH 8.5, one stage", back.first_stage_co2_mg_l, "mg/L", 1))
    cautions = list(LIME)
    if dose.below_practical_floor:
        cautions.append(
            "Softer than cold softening reaches in practice: about 35 mg/L calcium and 10 mg/L magnesium, as CaCO3."
        )
    cautions.append("Carbon dioxide gathers in recarbonation chambers: ventilate, and treat them as confined spaces.")
    lines = (
        Line("Free carbon dioxide", f"{co2:.1f} mg/L from pH, alkalinity and temperature", "PLUMMER-BUSENBERG-1982"),
        Line("Lime takes CO2, carbonate hardness, magnesium (twice) and the excess", "2 CO2 + CaCH + 2 MgCH + MgNCH + excess, meq/L", "WTPD-11"),
        Line("Soda ash takes non-carbonate hardness", "CaNCH + MgNCH, meq/L", "WTPD-11"),
        SOLVER,
    )  # fmt: skip
    return Answer(tuple(results), lines, tuple(cautions))


def exchange(values: Values) -> Answer:
    need = ion_exchange.salt_need(
        resin_m3=values["resin"],
        capacity_kg_m3=values["capacity"],
        salt_kg_m3=values["salt"],
        hardness_mg_l_caco3=values["hardness"],
        target_hardness_mg_l_caco3=values["target"],
    )
    return Answer(
        (
            Result("Salt per ML of blended water", need.salt_mg_l, "kg", 1, large=True),
            Result("Salt per regeneration", need.salt_kg_per_regeneration, "kg", 0, large=True),
            Result("Blended water between regenerations", need.throughput_m3, "m3", 0),
            Result("Share that may pass the softener", need.bypass_share * 100, "%", 1),
            Result("Sodium added to the blend", need.sodium_added_mg_l, "mg/L", 1),
        ),
        (
            Line("Blended water between regenerations", "resin × capacity ÷ hardness removed from the blend", "definition"),
            Line("Salt per hardness removed", f"{values['salt']:g} ÷ {values['capacity']:g} kg/kg", "definition"),
        ),
        ("Sodium matters to people on a low-salt diet; the brine is a waste with rules of its own.",),
    )


def sequester(values: Values) -> Answer:
    dose = sequestration.polyphosphate_dose(
        values["iron"], values["manganese"], mg_per_mg_iron=values["ratio_iron"], mg_per_mg_manganese=values["ratio_manganese"]
    )
    cautions = [
        "Suits iron and manganese of up to about 1.0 mg/L together, and goes in before any oxidant or aeration.",
        "Made-up solution reverts and grows: make it weekly, chlorinate the tank.",
    ]
    if dose.too_much_metal:
        cautions.insert(0, f"{dose.metals_mg_l:.2f} mg/L of iron and manganese is more than it holds.")
    return Answer(
        (
            Result("Polyphosphate product", dose.product_mg_l, "mg/L", 2, large=True),
            Result("Phosphate it adds, at 0.8 mg PO4 per mg", dose.phosphate_added_mg_l_po4, "mg/L as PO4", 2),
        ),
        (
            Line(
                "Ratios are settings, not laws",
                f"{values['ratio_iron']:g} × Fe + {values['ratio_manganese']:g} × Mn",
                "common practice, no source",
            ),
        ),
        tuple(cautions),
    )


COAGULANTS = (
    ("Al2(SO4)3.14H2O", "dry alum, Al2(SO4)3·14H2O"),
    ("FeCl3", "ferric chloride, FeCl3"),
    ("Fe2(SO4)3", "ferric sulfate, Fe2(SO4)3"),
)


def coagulate(values: Values) -> Answer:
    coagulant, dose = str(values["coagulant"]), float(values["dose"])
    used = coagulants.alkalinity_used_mg_l(coagulant, dose)
    left = coagulants.alkalinity_left_mg_l(coagulant, dose, values["alkalinity"])
    solids = coagulants.hydroxide_sludge_mg_l(coagulant, dose) + coagulants.suspended_solids_mg_l(values["turbidity"])
    return Answer(
        (
            Result("Alkalinity left", left, "mg/L as CaCO3", 1, large=True),
            Result("Alkalinity used", used, "mg/L as CaCO3", 1),
            Result("Metal in the dose", coagulants.metal_mg_l(coagulant, dose), "mg/L", 2),
            Result("Dry sludge, about", solids, "mg/L = kg/ML", 1),
        ),
        (
            Line("Alkalinity used", "three equivalents per mole of metal", "definition"),
            Line(
                "Suspended solids from turbidity",
                "1.5 mg/L per NTU: a textbook's figure, 0.7 to 2.2 elsewhere (from memory)",
                "common practice, no source",
            ),
        ),
        (
            "Alum and ferric salts are acids: never into or near hypochlorite, for chlorine gas comes off. The jar test decides the dose.",
        ),
    )


SHEETS = (
    Sheet("lime-soda", "Lime and soda ash", GROUP, "Doses by stoichiometry, what is left at equilibrium, sludge, recarbonation.",
          (*WATER, Field("target", "Hardness wanted", "mg/L as CaCO3", 100),
           Field("remove_magnesium", "Remove magnesium", choices=YES_NO, start="no"),
           Field("excess", "Excess lime where magnesium is removed", "mg/L as CaCO3", 62.5)), lime_soda),
    Sheet("ion-exchange", "Ion exchange", GROUP, "Salt, throughput, bypass and sodium.",
          (Field("hardness", "Hardness", "mg/L as CaCO3", 250, "hardness"), Field("target", "Hardness wanted", "mg/L as CaCO3", 100),
           Field("resin", "Resin", "m3", 5), Field("capacity", "Working capacity", "kg CaCO3/m3", 48),
           Field("salt", "Salt level", "kg NaCl/m3", 96)), exchange),
    Sheet("sequestrant", "Sequestrant", GROUP, "Polyphosphate for iron and manganese.",
          (Field("iron", "Iron", "mg/L", 0.3, "iron"), Field("manganese", "Manganese", "mg/L", 0.05, "manganese"),
           Field("ratio_iron", "Product per mg of iron", "mg/mg", 3), Field("ratio_manganese", "Product per mg of manganese", "mg/mg", 3)), sequester),
    Sheet("coagulant", "Coagulant", GROUP, "Alkalinity used and sludge made.",
          (Field("coagulant", "Coagulant", choices=COAGULANTS, start="FeCl3"), Field("dose", "Dose, dry", "mg/L", 20),
           Field("alkalinity", "Alkalinity", "mg/L as CaCO3", 150, "alkalinity"), Field("turbidity", "Turbidity", "NTU", 3, "turbidity")), coagulate),
)  # fmt: skip
