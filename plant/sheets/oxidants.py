"""Sheets on oxidants: demand, breakpoint, peroxide, disinfection, and how they keep in store."""

from __future__ import annotations

from chemistry import decay, disinfection, feed, fluoride, oxidants, peroxide
from plant.sheets.sheet import Answer, Field, Line, Result, Sheet, Values

GROUP = "Oxidants and disinfection"
FEEDING = "Feeding"
NEVER = (
    "Never mix hypochlorite with acids, ammonia or acid coagulants. Peroxide is always vented, never shut between two valves."
)


def demand(values: Values) -> Answer:
    oxidant = str(values["oxidant"])
    need = oxidants.demand_mg_l(
        oxidant,
        iron_mg_l=values["iron"],
        manganese_mg_l=values["manganese"],
        sulfide_mg_l_s=values["sulfide"],
        nitrite_mg_l_n=values["nitrite"],
    )
    dose = oxidants.dose_for_residual_mg_l(need + values["other"], values["residual"])
    return Answer(
        (
            Result(f"Dose as {oxidant}", dose, "mg/L", 2, large=True),
            Result("Stoichiometric demand of what was entered", need, "mg/L", 2),
        ),
        (
            Line("Demand by electrons", "Σ mg of oxidant per mg of what it oxidises", "definition"),
            Line("Dose = demand + residual wanted", f"{need + values['other']:.2f} + {values['residual']:g}", "MD0160"),
        ),
        ("A demand belongs to one contact time and place: a jar test of this water decides.", NEVER),
    )


def breakpoint_(values: Values) -> Answer:
    stage = oxidants.chlorine_to_nitrogen_stage(values["chlorine"], values["ammonia"])
    ratio = values["chlorine"] / values["ammonia"] if values["ammonia"] else 0.0
    return Answer(
        (
            Result("On the breakpoint curve", stage, large=True),
            Result("Chlorine to nitrogen", ratio, "mg/mg", 2),
            Result("Breakpoint by stoichiometry, at least", 7.59 * values["ammonia"], "mg/L as Cl2", 1),
        ),
        (Line("Monochloramine up to 5.06 mg Cl2 per mg N; breakpoint from 7.59", "by electrons", "definition"),),
        ("In practice breakpoint takes 10 to 15 mg/mg. Below it, trichloramine smells and dichloramine tastes.", NEVER),
    )


def quench(values: Values) -> Answer:
    return Answer(
        (
            Result(
                "Peroxide that takes this chlorine",
                peroxide.dose_to_quench_chlorine_mg_l(values["chlorine"]),
                "mg/L, 100 %",
                3,
                large=True,
            ),
            Result(
                "Chlorine that takes this peroxide",
                peroxide.chlorine_to_quench_mg_l(values["peroxide"]),
                "mg/L as Cl2",
                3,
                large=True,
            ),
            Result("Peroxide to go with this ozone", peroxide.dose_with_ozone_mg_l(values["ozone"]), "mg/L, 100 %", 3),
        ),
        (
            Line("H2O2 + HOCl = O2 + H2O + HCl", "0.480 mg H2O2 per mg Cl2; 2.084 the other way", "definition"),
            Line("2 O3 + H2O2", "0.354 mg H2O2 per mg O3; a works sets its own, usually 0.3 to 0.6", "definition"),
        ),
        (
            peroxide.dpd_remark(float(values["peroxide"])) or "Where peroxide is present a DPD reading can't be believed.",
            "Quenching is hard to hit in practice: test before and after. " + NEVER,
        ),
    )


def contact(values: Values) -> Answer:
    segment = disinfection.Segment(
        volume_m3=values["volume"],
        baffling_factor=values["baffling"],
        peak_flow_m3_h=values["flow"],
        residual_mg_l=values["chlorine"],
        temperature_c=values["temperature"],
        ph=values["ph"],
    )
    found = disinfection.segment_result(segment)
    ratio = disinfection.inactivation_ratio(found.log_giardia, values["required"])
    evidence = sorted({cell.evidence for cell in found.cells})
    return Answer(
        (
            Result("Inactivation ratio", ratio, "", 2, large=True),
            Result("Giardia by disinfection", found.log_giardia, "log", 2),
            Result("CT", found.ct_mg_min_l, "mg·min/L", 1),
            Result("T10", found.t10_min, "min", 1),
            Result("CT for 3 logs, from the table", found.ct_3_log_mg_min_l, "mg·min/L", 0),
        ),
        (
            Line(
                "T10 = volume at the minimum level ÷ peak hourly flow × baffling factor",
                f"{found.t10_min:.1f} min",
                "EPA-816-R-03-004",
            ),
            Line(
                "CT = residual at the end × T10",
                f"{values['chlorine']:g} × {found.t10_min:.1f} = {found.ct_mg_min_l:.1f}",
                "40 CFR 141.720(a)(1)",
            ),
            Line(
                "Table: lower temperature, higher pH, higher residual taken",
                f"evidence of the cells: {'; '.join(evidence)}",
                "40 CFR 141.74, tables 1.1 to 1.6",
            ),
        ),
        (
            "Have the table compared with the law before it is used for compliance. A ratio just under 1 is under 1: it is never rounded up.",
        ),
    )


def keeping(values: Values) -> Answer:
    left = decay.hypochlorite_strength_after(values["strength"], [values["temperature"]], [values["days"]], extrapolate=True)
    remarks = decay.hypochlorite_range_remarks(values["strength"], [values["temperature"]])
    return Answer(
        (
            Result("Available chlorine left", float(left), "g/L", 1, large=True),
            Result("Of what it was", float(left) / values["strength"] * 100, "%", 1),
            Result("The same litres dose less by", (1 - float(left) / values["strength"]) * 100, "%", 1),
        ),
        (
            Line(
                "Second order: 1/C = 1/C0 + k2 t",
                "log k2 = 0.149 µ + log(2.083e10 T e^(−1.018e5/RT) e^(−56.5/R))",
                "ADAM-GORDON-1999",
            ),
        ),
        (
            *remarks,
            "Clean product assumed; nickel, copper or a pH below 11 make it faster. Test the strength; vent lines, for oxygen comes off.",
        ),
    )


def feeding(values: Values) -> Answer:
    share = float(values["active"]) / 100
    litres = feed.feed_l_h(values["dose"], values["flow"], share, values["density"])
    return Answer(
        (
            Result("Feeder", litres, "L/h", 3, large=True),
            Result("Draw-down to expect", litres * 1000 / 60, "mL/min", 1, large=True),
            Result("Product per ML", feed.product_kg(values["dose"], share, 1.0), "kg", 2),
            Result("Product per day", feed.product_kg(values["dose"], share, float(values["flow"]) * 24 / 1000), "kg", 1),
        ),
        (
            Line(
                "Feed = dose × flow ÷ (1000 × active share × density)",
                f"{values['dose']:g} × {values['flow']:g} ÷ (1000 × {share:g} × {values['density']:g})",
                "ABC-TABLES",
            ),
        ),
        ("Check by draw-down at running pressure, after any change of stroke, product or pressure.",),
    )


ADDITIVES = (("H2SiF6", "fluorosilicic acid"), ("NaF", "sodium fluoride"), ("Na2SiF6", "sodium fluorosilicate"))


def fluoridate(values: Values) -> Answer:
    add = fluoride.fluoride_to_add_mg_l(values["target"], values["natural"])
    product = fluoride.additive_mg_l(add, str(values["additive"]), float(values["purity"]) / 100)
    return Answer(
        (Result("Additive as bought", product, "mg/L = kg/ML", 2, large=True), Result("Fluoride to add", add, "mg/L", 2)),
        (
            Line(
                "Dose = target − natural; additive = F ÷ (its fluoride content × purity)",
                f"{values['target']:g} − {values['natural']:g} = {add:.2f}",
                "MADPH-2015",
            ),
        ),
        ("Fluorosilicic acid: own room, vented outside, on a scale; hydrofluoric acid burns are treated at once.",),
    )


SHEETS = (
    Sheet("oxidant-demand", "Oxidant demand and dose", GROUP, "Chlorine, permanganate, ozone, peroxide or chlorine dioxide for metals, sulfide and nitrite.",
          (Field("oxidant", "Oxidant", choices=tuple((name, name) for name in ("Cl2", "KMnO4", "O3", "H2O2", "ClO2")), start="Cl2"),
           Field("iron", "Iron (II)", "mg/L", 0.3, "iron"), Field("manganese", "Manganese (II)", "mg/L", 0.05, "manganese"),
           Field("sulfide", "Sulfide", "mg/L as S", 0, "sulfide"), Field("nitrite", "Nitrite", "mg/L as N", 0, "nitrite"),
           Field("other", "Other demand, from a jar test", "mg/L", 0.5), Field("residual", "Residual wanted", "mg/L", 0.5)), demand),
    Sheet("breakpoint", "Breakpoint and chloramine", GROUP, "Where a chlorine dose stands on the breakpoint curve.",
          (Field("chlorine", "Chlorine dose", "mg/L as Cl2", 2), Field("ammonia", "Ammonia", "mg/L as N", 0.4, "ammonia")), breakpoint_),
    Sheet("peroxide", "Hydrogen peroxide", GROUP, "Quenching both ways, and with ozone.",
          (Field("chlorine", "Free chlorine", "mg/L as Cl2", 1, "free_chlorine"), Field("peroxide", "Peroxide", "mg/L", 1, "hydrogen_peroxide"),
           Field("ozone", "Ozone", "mg/L", 1, "ozone")), quench),
    Sheet("contact", "Contact time and inactivation", GROUP, "CT of one segment against the table for free chlorine.",
          (Field("volume", "Volume at the minimum level", "m3", 900), Field("flow", "Peak hourly flow", "m3/h", 500),
           Field("baffling", "Baffling factor", "", 0.5), Field("chlorine", "Free chlorine at the end", "mg/L", 0.8, "free_chlorine"),
           Field("ph", "pH", "", 7.5, "pH"), Field("temperature", "Temperature", "°C", 10, "temperature"),
           Field("required", "Logs required of disinfection", "log", 0.5)), contact),
    Sheet("hypochlorite-keeping", "How hypochlorite keeps", GROUP, "Strength after a time in store.",
          (Field("strength", "Strength now", "g/L available chlorine", 125), Field("temperature", "Store", "°C", 20), Field("days", "Time", "days", 30)), keeping),
    Sheet("feeder", "Feeder setting and draw-down", FEEDING, "The feed that gives a dose at a flow.",
          (Field("dose", "Dose", "mg/L", 1.1), Field("flow", "Flow", "m3/h", 500), Field("active", "Active in the product", "weight %", 10.4),
           Field("density", "Density", "kg/L", 1.2)), feeding),
    Sheet("fluoride", "Fluoride", FEEDING, "Additive for a target, the natural fluoride counted once.",
          (Field("target", "Fluoride wanted", "mg/L", 0.7), Field("natural", "Natural fluoride", "mg/L", 0.2, "fluoride"),
           Field("additive", "Additive", choices=ADDITIVES, start="H2SiF6"), Field("purity", "Strength", "%", 23)), fluoridate),
)  # fmt: skip
