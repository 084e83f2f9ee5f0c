"""Kestrel Ford Water Works, the demo: a softening works of about 12 ML a day with seven chemicals. All invented."""

from __future__ import annotations

import datetime as dt

from plant.demo.plan import Block, Feed, Incident, Line, Plan, Season, Waters

_WATERS = Waters(
    flow_ml_d=Season(12.0, 1.6, 0.35, 6.0),
    temperature_c=Season(10.2, 4.6, 0.4, 2.0),
    calcium_mg_l=Season(84.0, -5.0, 1.6, 40.0),
    magnesium_mg_l=Season(14.0, -0.8, 0.4, 5.0),
    alkalinity_mg_l=Season(212.0, -11.0, 3.0, 120.0),
    ph=Season(7.34, 0.04, 0.025, 6.9),
    turbidity_ntu=Season(2.6, -0.5, 0.35, 0.9),
    iron_mg_l=Season(0.46, 0.05, 0.04, 0.05),
    manganese_mg_l=Season(0.13, 0.03, 0.012, 0.02),
    fluoride_mg_l=Season(0.21, 0.0, 0.008, 0.05),
    chlorine_demand_mg_l=Season(0.52, 0.16, 0.025, 0.15),
    peroxide_demand_mg_l=Season(1.55, 0.25, 0.05, 0.4),
    filtered_ph=Season(7.72, 0.03, 0.02, 7.2),
    store_temperature_c=Season(17.5, 3.5, 0.6, 8.0),
)
_NO_WEEKEND = ["Sat", "Sun"]

_PEROXIDE = Feed(
    wants="peroxide",
    product={
        "code": "PEROX", "name": "Hydrogen peroxide 35 %", "chemical": "H2O2", "strength": 35.0,
        "strength_basis": "weight_pct", "density_kg_per_L": 1.13, "strength_sd_pct": 0.7, "dose_basis": "H2O2",
        "certified_maximum_mg_per_L": 8.6, "shelf_life_days": 365, "storage_temperature_C": 17.0,
        "lead_time_days": 5, "load_kg": 1600, "reserve_days": 6, "no_delivery_days": _NO_WEEKEND,
    },
    tank={
        "code": "PEROX-TANK", "name": "Peroxide tank", "product": "PEROX", "role": "bulk",
        "shape": "vertical_cylinder", "diameter_m": 0.9, "height_m": 4.0, "level_sd_m": 0.002, "heel_L": 100,
        "max_fill_pct": 90, "containment": "BUND-C",
    },
    point={
        "code": "PEROX-PRE", "name": "Peroxide to raw water", "meter": "FT-RAW", "before": "RAW",
        "sample_point": "SETTLED",
        "need": {"model": "oxidant_demand", "demand_from": "last_7_days", "target_residual_mg_per_L": 0.25},
    },
    design_mg_l=0.0, load_kg=1600, opening_share=0.55,
)  # fmt: skip
_COAGULANT = Feed(
    wants="coagulant",
    product={
        "code": "FERRIC", "name": "Ferric chloride solution", "chemical": "FeCl3", "strength": 13.8,
        "strength_basis": "weight_pct", "strength_as": "Fe", "density_kg_per_L": 1.42, "strength_sd_pct": 0.8,
        "dose_basis": "Fe", "certified_maximum_mg_per_L": 250.0, "shelf_life_days": 365, "lead_time_days": 6,
        "load_kg": 7000, "reserve_days": 8, "no_delivery_days": _NO_WEEKEND,
    },
    tank={
        "code": "FERRIC-BULK", "name": "Ferric bulk tank", "product": "FERRIC", "role": "bulk",
        "shape": "vertical_cylinder", "diameter_m": 1.5, "height_m": 5.2, "level_sd_m": 0.002, "heel_L": 250,
        "max_fill_pct": 92, "containment": "BUND-A",
    },
    point={
        "code": "FERRIC-MIX", "name": "Ferric to flash mixer", "meter": "FT-RAW", "before": "RAW",
        "sample_point": "FILTERED",
        "need": {
            "model": "curve", "parameter": "turbidity",
            "points": [[0.2, 1.9], [3.0, 2.4], [8.0, 3.1], [20.0, 4.4], [60.0, 7.0]],
        },
    },
    design_mg_l=0.0, load_kg=7000, opening_share=0.5,
)  # fmt: skip
_LIME = Feed(
    wants="lime",
    product={
        "code": "LIME", "name": "Hydrated lime", "chemical": "Ca(OH)2", "strength": 93.0,
        "strength_basis": "weight_pct", "strength_sd_pct": 1.0, "dose_basis": "Ca(OH)2",
        "certified_maximum_mg_per_L": 650.0, "shelf_life_days": 180, "lead_time_days": 3, "load_kg": 24000,
        "reserve_days": 8, "no_delivery_days": _NO_WEEKEND,
    },
    tank={
        "code": "LIME-SILO", "name": "Lime silo on load cells", "product": "LIME", "role": "silo",
        "shape": "scale", "capacity_kg": 60000, "tare_kg": 0.0, "weight_sd_kg": 60.0, "heel_kg": 1500,
        "max_fill_pct": 95,
    },
    point={
        "code": "LIME-SOFT", "name": "Lime to softener", "meter": "FT-RAW", "feed_meter": "WF-LIME",
        "before": "RAW", "sample_point": "FILTERED",
        "need": {"model": "lime_soda", "target_hardness_mg_per_L_CaCO3": 180.0, "part": "lime"},
    },
    design_mg_l=0.0, load_kg=24000, feed_meter_sd=0.006, opening_share=0.7, feeder_unit="kg/h",
)  # fmt: skip
_CAUSTIC = Feed(
    wants="caustic",
    product={
        "code": "NAOH", "name": "Caustic soda 25 %", "chemical": "NaOH", "strength": 25.0,
        "strength_basis": "weight_pct", "density_kg_per_L": 1.273, "strength_sd_pct": 0.7, "dose_basis": "NaOH",
        "certified_maximum_mg_per_L": 200.0, "shelf_life_days": 365, "lead_time_days": 5, "load_kg": 4000,
        "reserve_days": 7, "no_delivery_days": _NO_WEEKEND,
    },
    tank={
        "code": "NAOH-BULK", "name": "Caustic bulk tank", "product": "NAOH", "role": "bulk",
        "shape": "vertical_cylinder", "diameter_m": 1.25, "height_m": 4.8,
        "level_sd_m": 0.002, "heel_L": 180, "max_fill_pct": 92, "containment": "BUND-B",
    },
    point={
        "code": "NAOH-PH", "name": "Caustic to final pH", "meter": "FT-TREATED", "before": "FILTERED",
        "sample_point": "ENTRY", "need": {"model": "target_ph", "target_ph": 8.2},
    },
    design_mg_l=0.0, load_kg=4000, opening_share=0.6,
)  # fmt: skip
_HYPO = Feed(
    wants="chlorine",
    product={
        "code": "HYPO", "name": "Sodium hypochlorite solution", "chemical": "NaOCl", "strength": 125.0,
        "strength_basis": "g_per_L_available_chlorine", "density_kg_per_L": 1.2, "strength_sd_pct": 1.5,
        "dose_basis": "Cl2", "certified_maximum_mg_per_L": 90.0, "shelf_life_days": 45,
        "storage_temperature_C": 18.0, "lead_time_days": 4, "load_kg": 3000, "reserve_days": 8,
        "no_delivery_days": _NO_WEEKEND,
    },
    tank={
        "code": "HYPO-BULK", "name": "Hypochlorite bulk tank", "product": "HYPO", "role": "bulk",
        "shape": "horizontal_cylinder", "diameter_m": 1.5, "length_m": 2.4, "heads": "elliptical_2_1",
        "level_sd_m": 0.003, "heel_L": 150,
        "max_fill_pct": 92, "containment": "BUND-B",
    },
    day_tank={
        "code": "HYPO-DAY", "name": "Hypochlorite day tank", "product": "HYPO", "role": "day",
        "shape": "vertical_cylinder", "diameter_m": 0.62, "height_m": 1.0, "level_sd_m": 0.002, "heel_L": 15,
        "max_fill_pct": 95, "containment": "BUND-B", "fed_from": "HYPO-BULK",
    },
    point={
        "code": "HYPO-POST", "name": "Hypochlorite after filtration", "meter": "FT-TREATED",
        "before": "FILTERED", "sample_point": "ENTRY",
        "need": {"model": "oxidant_demand", "demand_from": "last_7_days", "target_residual_mg_per_L": 0.5},
    },
    design_mg_l=0.0, load_kg=3000, opening_share=0.5, feeder_unit="L/h",
)  # fmt: skip
_SEQUESTRANT = Feed(
    wants="sequestrant",
    product={
        "code": "POLYP", "name": "Polyphosphate solution", "chemical": "polyphosphate", "strength": 36.0,
        "strength_basis": "weight_pct", "strength_sd_pct": 1.0, "density_kg_per_L": 1.35, "dose_basis": "product",
        "certified_maximum_mg_per_L": 27.0, "shelf_life_days": 180, "lead_time_days": 7, "load_kg": 1300,
        "reserve_days": 7, "no_delivery_days": _NO_WEEKEND,
    },
    tank={
        "code": "POLYP-IBC", "name": "Polyphosphate container on a scale", "product": "POLYP", "role": "drum",
        "shape": "scale", "capacity_kg": 1400, "tare_kg": 62.0, "weight_sd_kg": 0.5, "heel_kg": 8,
        "max_fill_pct": 100,
    },
    point={
        "code": "POLYP-SEQ", "name": "Polyphosphate to clearwell", "meter": "FT-TREATED", "before": "FILTERED",
        "sample_point": "ENTRY",
        "need": {"model": "sequestrant", "base_mg_per_L": 2.2, "mg_per_mg_manganese": 12.0},
    },
    design_mg_l=0.0, load_kg=1300, refill="change", opening_share=0.8,
)  # fmt: skip
_FLUORIDE = Feed(
    wants="fluoride",
    product={
        "code": "FSA", "name": "Fluorosilicic acid 23 %", "chemical": "H2SiF6", "strength": 23.0,
        "strength_basis": "weight_pct", "density_kg_per_L": 1.2, "strength_sd_pct": 0.8, "dose_basis": "F",
        "certified_maximum_mg_per_L": 6.0, "shelf_life_days": 365, "lead_time_days": 8, "load_kg": 1200,
        "reserve_days": 12, "no_delivery_days": [*_NO_WEEKEND, "Mon"],
    },
    tank={
        "code": "FSA-TANK", "name": "Fluorosilicic acid tank on a scale", "product": "FSA", "role": "bulk",
        "shape": "scale", "capacity_kg": 2200, "tare_kg": 310.0, "weight_sd_kg": 0.5, "heel_kg": 40,
        "max_fill_pct": 92, "containment": "BUND-F",
    },
    point={
        "code": "FSA-POST", "name": "Fluoride to clearwell", "meter": "FT-TREATED", "before": "FILTERED",
        "sample_point": "ENTRY", "need": {"model": "fluoride", "target_mg_per_L": 0.7},
    },
    design_mg_l=0.0, load_kg=1200, opening_share=0.7,
)  # fmt: skip

_FEEDS = (_PEROXIDE, _COAGULANT, _LIME, _CAUSTIC, _HYPO, _SEQUESTRANT, _FLUORIDE)

_LINES = (
    Line("RAW", "temperature", "°C", 1, 0.1),
    Line("RAW", "pH", "pH", 2, 0.02),
    Line("RAW", "turbidity", "NTU", 1, 0.05, 0.03),
    Line("RAW", "alkalinity", "mg/L as CaCO3", 0, 1.5),
    Line("RAW", "hardness", "mg/L as CaCO3", 0, 2.0),
    Line("RAW", "calcium", "mg/L", 1, 0.8, due="day"),
    Line("RAW", "magnesium", "mg/L", 1, 0.3, due="day"),
    Line("RAW", "iron", "mg/L", 2, 0.01, due="day"),
    Line("RAW", "manganese", "mg/L", 3, 0.003, due="day"),
    Line("FT-RAW", "totaliser", "m3", 0),
    Line("PEROX-TANK", "level", "m", 3),
    Line("FERRIC-BULK", "level", "m", 3),
    Line("LIME-SILO", "weight", "kg", 0),
    Line("WF-LIME", "totaliser", "kg", 0),
    Line("LIME-SOFT", "feeder_setting", "kg/h", 1),
    Line("SETTLED", "hydrogen_peroxide", "mg/L", 2, 0.02, below=0.05),
    Line("SETTLED", "pH", "pH", 2, 0.03),
    Line("FILTERED", "temperature", "°C", 1, 0.1),
    Line("FILTERED", "pH", "pH", 2, 0.02),
    Line("FILTERED", "turbidity", "NTU", 2, 0.01, 0.03),
    Line("FILTERED", "alkalinity", "mg/L as CaCO3", 0, 1.5),
    Line("FILTERED", "calcium", "mg/L", 1, 0.8, due="day"),
    Line("FILTERED", "manganese", "mg/L", 3, 0.002, due="day", below=0.01),
    Line("FILTERED", "fluoride", "mg/L", 2, 0.01, due="day"),
    Line("HYPO-DAY", "level", "m", 3),
    Line("HYPO-BULK", "level", "m", 3, due="day"),
    Line("HYPO-BULK", "strength", "g/L", 1, 1.2, due="week"),
    Line("HYPO-POST", "feeder_setting", "L/h", 2),
    Line("NAOH-BULK", "level", "m", 3),
    Line("POLYP-IBC", "weight", "kg", 1),
    Line("FSA-TANK", "weight", "kg", 1),
    Line("ENTRY", "free_chlorine", "mg/L", 2, 0.015),
    Line("ENTRY", "total_chlorine", "mg/L", 2, 0.015, due="day"),
    Line("ENTRY", "pH", "pH", 2, 0.02),
    Line("ENTRY", "temperature", "°C", 1, 0.1, due="day"),
    Line("ENTRY", "turbidity", "NTU", 2, 0.008, 0.03),
    Line("ENTRY", "hardness", "mg/L as CaCO3", 0, 2.0),
    Line("ENTRY", "alkalinity", "mg/L as CaCO3", 0, 1.5, due="day"),
    Line("ENTRY", "fluoride", "mg/L", 2, 0.012),
    Line("ENTRY", "iron", "mg/L", 2, 0.003, due="day", below=0.02),
    Line("FT-TREATED", "peak_hourly_flow", "m3/h", 0, due="evening"),
    Line("FT-TREATED", "totaliser", "m3", 0),
    Line("NETWORK", "free_chlorine", "mg/L", 2, 0.02, due="day", below=0.05),
    Line("NETWORK", "total_coliform", "CFU/100mL", 0, due="week"),
    Line("NETWORK", "e_coli", "CFU/100mL", 0, due="week"),
)

_REGULATOR = [{"who": "Regulator, drinking water desk", "within_hours": 24}]
_SOURCE = "invented permit of the demo works"
_LIMITS: list[Block] = [
    {"code": "entry-free-chlorine-low", "sample_point": "ENTRY", "parameter": "free_chlorine", "kind": "bound",
     "level": "action", "low": "0.30", "unit": "mg/L", "source": _SOURCE},
    {"code": "entry-free-chlorine-high", "sample_point": "ENTRY", "parameter": "free_chlorine", "kind": "bound",
     "level": "alert", "high": "0.90", "unit": "mg/L", "source": "stated by the works"},
    {"code": "entry-free-chlorine-held", "sample_point": "ENTRY", "parameter": "free_chlorine",
     "kind": "held_below", "level": "regulatory", "limit": "0.20", "hours": 4, "unit": "mg/L",
     "source": _SOURCE, "tell": _REGULATOR},
    {"code": "entry-ph", "sample_point": "ENTRY", "parameter": "pH", "kind": "bound", "level": "alert",
     "low": "7.8", "high": "8.6", "source": "stated by the works"},
    {"code": "entry-ph-permit", "sample_point": "ENTRY", "parameter": "pH", "kind": "bound", "level": "regulatory",
     "low": "6.5", "high": "9.5", "source": _SOURCE, "tell": _REGULATOR},
    {"code": "filtered-turbidity-share", "sample_point": "FILTERED", "parameter": "turbidity",
     "kind": "share_of_month", "level": "regulatory", "limit": "0.3", "at_least_pct": 95, "unit": "NTU",
     "source": _SOURCE},
    {"code": "filtered-turbidity-high", "sample_point": "FILTERED", "parameter": "turbidity", "kind": "bound",
     "level": "action", "high": "0.5", "unit": "NTU", "source": _SOURCE},
    {"code": "entry-hardness", "sample_point": "ENTRY", "parameter": "hardness", "kind": "bound",
     "level": "target", "low": "150", "high": "210", "source": "stated by the works"},
    {"code": "entry-fluoride", "sample_point": "ENTRY", "parameter": "fluoride", "kind": "bound", "level": "alert",
     "low": "0.50", "high": "0.90", "unit": "mg/L", "source": "stated by the works"},
    {"code": "entry-fluoride-permit", "sample_point": "ENTRY", "parameter": "fluoride", "kind": "bound",
     "level": "regulatory", "high": "1.5", "unit": "mg/L", "source": _SOURCE, "tell": _REGULATOR},
    {"code": "network-e-coli", "sample_point": "NETWORK", "parameter": "e_coli", "kind": "bound",
     "level": "regulatory", "high": "0", "unit": "CFU/100mL", "source": _SOURCE, "tell": _REGULATOR},
    {"code": "clearwell-ct", "contact_segment": "CLEARWELL", "kind": "inactivation_ratio", "level": "regulatory",
     "low": "1.0", "source": _SOURCE, "tell": _REGULATOR},
    {"code": "hypo-days", "vessel": "HYPO-BULK", "kind": "days_of_supply", "level": "alert", "low": "7",
     "source": "stated by the works"},
    {"code": "lime-days", "vessel": "LIME-SILO", "kind": "days_of_supply", "level": "alert", "low": "6",
     "source": "stated by the works"},
    {"code": "hypo-age", "vessel": "HYPO-BULK", "kind": "lot_age", "level": "alert",
     "source": "stated by the works"},
    {"code": "fluoride-product-maximum", "dosing_point": "FSA-POST", "kind": "certified_maximum",
     "level": "regulatory", "source": _SOURCE},
    {"code": "polyp-product-maximum", "dosing_point": "POLYP-SEQ", "kind": "certified_maximum",
     "level": "regulatory", "source": _SOURCE},
]  # fmt: skip

KESTREL = Plan(
    code="KFW",
    name="Kestrel Ford Water Works",
    timezone="Europe/Berlin",
    day_starts=dt.time(7, 0),
    shifts=(("day", dt.time(7, 0)), ("night", dt.time(19, 0))),
    waters=_WATERS,
    treated_meter="FT-TREATED",
    raw_meter="FT-RAW",
    feeds=_FEEDS,
    lines=_LINES,
    target_hardness_mg_l=180.0,
    coagulant_curve=((0.2, 1.9), (3.0, 2.4), (8.0, 3.1), (20.0, 4.4), (60.0, 7.0)),
    sequestrant_base_mg_l=2.2,
    sequestrant_per_manganese=5.4,
    blocks={
        "sample_point": [
            {"code": "RAW", "name": "Raw water, wells and river", "stage": "raw"},
            {"code": "SETTLED", "name": "After the softener", "stage": "process"},
            {"code": "FILTERED", "name": "After filtration", "stage": "process"},
            {"code": "ENTRY", "name": "Works outlet", "stage": "entry"},
            {"code": "NETWORK", "name": "Market square tap", "stage": "network"},
        ],
        "meter": [
            {"code": "FT-RAW", "name": "Raw water totaliser", "unit": "m3", "digits": 8, "max_flow_m3_per_h": 1200,
             "accuracy_pct": 0.5},
            {"code": "FT-TREATED", "name": "Treated water totaliser", "unit": "m3", "digits": 7,
             "max_flow_m3_per_h": 1200, "accuracy_pct": 0.5},
            {"code": "WF-LIME", "name": "Weigh feeder of the lime", "unit": "kg", "digits": 7, "accuracy_pct": 0.6},
        ],
        "limit": _LIMITS,
        "contact_segment": [
            {"code": "CLEARWELL", "volume_m3": 2600, "baffling_factor": 0.5, "peak_flow_meter": "FT-TREATED",
             "sample_point": "ENTRY", "required_log_giardia": 0.5, "required_log_virus": 2.0},
        ],
        "call": [
            {"code": "shift", "name": "the other shift's operator", "telephone": "0555 0101", "level": "action"},
            {"code": "supervisor", "name": "Paula Sievers", "telephone": "0555 0102", "level": "action", "minutes": 20},
            {"code": "manager", "name": "Henrik Voss", "telephone": "0555 0103", "level": "regulatory", "minutes": 60},
        ],
        "report": [
            {"regulator": "Drinking water desk of the county (invented)", "permit_number": "KFW-7781",
             "due_day": 10},
        ],
    },
)  # fmt: skip


def incidents(days: int) -> list[Incident]:
    """The demo's dozen and a half, told from the end of its history, so that the last full month has its share."""

    def ago(what: str, cause: str, subject: str, back: float, length: float, size: float, words: str) -> Incident:
        return Incident(what, cause, subject, days - back, days - back + length, size, words)

    return [
        ago("meter_change", "", "FT-RAW", 301.1, 1, 120, "raw water meter exchanged"),
        ago("raw_water_change", "raw_water_change", "RAW", 262, 12, 16, "hard wells only, river too turbid"),
        ago("feeder_drift", "feeder_drift", "FSA-POST", 214, 14, -0.012, "fluoride pump's membrane ageing"),
        ago("weak_lot", "weak_product", "HYPO-BULK", 176, 20, 0.84, "a lot stored warm by the supplier"),
        ago("wrong_reading", "wrong_reading", "RAW:pH", 133, 1, 100, "740 written for 7.40"),
        ago("out_of_service", "", "FSA-POST", 118, 3, 0, "fluoride off for the yearly service"),
        ago("leak", "leak", "PEROX-TANK", 97, 6, 0.85, "a flange of the peroxide tank weeps"),
        ago("late_entry", "", "", 75.55, 0.4, 2, "tablet flat; the night round came from paper"),
        ago("feeder_drift", "feeder_drift", "NAOH-PH", 57, 16, 0.013, "caustic pump drifts up"),
        ago("missing_round", "missing_readings", "", 81.55, 0.3, 0, "burst main: nobody did the round"),
        ago("wrong_booking", "", "FERRIC-BULK", 64, 30, 0.1, "a figure lost when booking"),
        ago("weak_lot", "weak_product", "HYPO-BULK", 46, 20, 0.86, "certificate and test disagree"),
        ago("second_thoughts", "", "ENTRY:hardness", 43, 1, 1.1, "typed twice"),
        ago("feeder_stop", "unknown", "HYPO-POST", 39.2, 0.36, 0.62, "air in the suction line of the pump"),
        ago("stuck", "stuck_sensor", "FERRIC-BULK:level", 36, 3.5, 0, "float of the gauge hangs"),
        ago("wrong_reading", "wrong_reading", "ENTRY:pH", 33, 1, 100, "a decimal point lost"),
        ago("unbooked_delivery", "unbooked_delivery", "NAOH-BULK", 36, 30, 3, "paper left in the driver's cab"),
        ago("raw_water_change", "raw_water_change", "RAW", 29, 9, 15, "river intake shut, wells only"),
        ago("not_taken", "missing_readings", "NAOH-BULK:level", 51.55, 0.3, 0, ""),
        ago("not_taken", "", "SETTLED:hydrogen_peroxide", 24, 1.5, 0, "reagent used up"),
        ago("leak", "leak", "PEROX-TANK", 19, 4, 0.9, "drain valve not quite shut"),
        ago("feeder_drift", "feeder_drift", "FSA-POST", 13, 12, -0.014, "fluoride pump loses stroke"),
        ago("wrong_reading", "wrong_reading", "RAW:pH", 6, 1, 100, "740 written for 7.40"),
        ago("late_entry", "", "", 4.55, 0.4, 1, "no signal in the dosing room"),
    ]
