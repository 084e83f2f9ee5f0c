"""What may be stated of a works: every kind of block, its keys, and what each key may hold.

These tables are the schema of the works file and of the settings pages alike; blocks.py reads them.
"""

from __future__ import annotations

from dataclasses import dataclass, field

WATER_UNITS = ("m3", "ML", "L", "US_gal", "US_Mgal")
PRODUCT_UNITS = ("kg", "lb", "L")
WEEKDAYS = ("Mon", "Tue", "Wed", "Thu", "Fri", "Sat", "Sun")


@dataclass(frozen=True)
class Key:
    """One key of a block.

    ``holds``: text, code, number, whole, flag, flag_or_number, time, date, moment, choice, formula, refs (a list of codes),
    weekdays, due, points (a list of pairs), tell, need. ``refers`` names the kind of block a code must be of.
    ``above`` is an exclusive lower bound, ``low`` and ``high`` are inclusive.
    """

    name: str
    holds: str = "text"
    required: bool = False
    choices: tuple[str, ...] = ()
    refers: str = ""
    low: float | None = None
    high: float | None = None
    above: float | None = None
    help: str = ""


@dataclass(frozen=True)
class Kind:
    """One kind of block. ``names`` are the keys that name its subject; they stay in the value if ``kept``."""

    name: str
    title: str
    names: tuple[str, ...]
    keys: tuple[Key, ...]
    kept: bool = False
    site: bool = False
    page: bool = True
    about: str = ""
    extra: dict[str, tuple[Key, ...]] = field(default_factory=dict)


def _positive(name: str, *, required: bool = False, text: str = "") -> Key:
    return Key(name, "number", required=required, above=0.0, help=text)


def _from_zero(name: str, *, required: bool = False, high: float | None = None, text: str = "") -> Key:
    return Key(name, "number", required=required, low=0.0, high=high, help=text)


_NAME = Key("name", help="as it is printed")

STRENGTH_BASES = ("g_per_L_available_chlorine", "trade_pct", "weight_pct_available_chlorine", "weight_pct")

NEED_MODELS: dict[str, tuple[Key, ...]] = {
    "none": (),
    "oxidant_demand": (
        _from_zero("demand_mg_per_L"),
        Key("demand_from", "choice", choices=("last_7_days",)),
        _from_zero("target_residual_mg_per_L", required=True),
    ),
    "lime_soda": (
        _from_zero("target_hardness_mg_per_L_CaCO3", required=True),
        Key("remove_magnesium", "flag"),
        _from_zero("excess_mg_per_L_CaCO3"),
        Key("part", "choice", required=True, choices=("lime", "soda_ash", "caustic")),
    ),
    "ion_exchange_salt": (
        _positive("resin_m3", required=True),
        _positive("capacity_kg_CaCO3_per_m3", required=True),
        _positive("salt_kg_per_m3", required=True),
        _from_zero("target_hardness_mg_per_L_CaCO3", required=True),
    ),
    "target_ph": (Key("target_ph", "number", required=True, low=0.0, high=14.0),),
    "quench": (
        Key("of", "choice", required=True, choices=("chlorine", "peroxide")),
        _from_zero("target_mg_per_L"),
    ),
    "oxidise": (
        Key("iron", "flag_or_number", low=0.0),
        Key("manganese", "flag_or_number", low=0.0),
        Key("sulfide", "flag_or_number", low=0.0),
        Key("sulfide_to", "choice", choices=("sulfur", "sulfate")),
    ),
    "sequestrant": (
        _from_zero("mg_per_mg_iron"),
        _from_zero("mg_per_mg_manganese"),
        _from_zero("base_mg_per_L"),
    ),
    "curve": (Key("parameter", required=True), Key("points", "points", required=True)),
    "fluoride": (_positive("target_mg_per_L", required=True),),
}
"""Keys of each need model, all beside ``max_age_hours``."""

SHAPES: dict[str, tuple[Key, ...]] = {
    "vertical_cylinder": (_positive("diameter_m", required=True), _positive("height_m", required=True)),
    "horizontal_cylinder": (
        _positive("diameter_m", required=True),
        _positive("length_m", required=True),
        Key(
            "heads",
            "choice",
            required=True,
            choices=("flat", "elliptical_2_1", "torispherical", "hemispherical"),
        ),
    ),
    "cone_bottom": (
        _positive("diameter_m", required=True),
        _from_zero("height_m", required=True, text="of the straight part"),
        _positive("cone_height_m", required=True),
    ),
    "strapping": (Key("table", "points", required=True, help="pairs of level in m and volume in L"),),
    "scale": (_positive("capacity_kg"), _from_zero("tare_kg"), _positive("weight_sd_kg")),
}
"""Measures of each vessel shape."""

LOW, HIGH = Key("low", "number"), Key("high", "number")
LIMIT_KINDS: dict[str, tuple[Key, ...]] = {
    "bound": (LOW, HIGH),
    "held_below": (Key("limit", "number", required=True), _positive("hours", required=True)),
    "held_above": (Key("limit", "number", required=True), _positive("hours", required=True)),
    "share_of_month": (
        Key("limit", "number", required=True),
        Key("at_least_pct", "number", required=True, above=0.0, high=100.0),
    ),
    "running_mean": (Key("months", "whole", required=True, low=1, high=120), LOW, HIGH),
    "rate_of_change": (_positive("per_hour", required=True),),
    "stuck": (Key("readings", "whole", low=2, high=1000),),
    "missing": (_positive("hours"),),
    "dose_vs_design": (_positive("pct"),),
    "dose_vs_need": (_positive("pct"),),
    "certified_maximum": (Key("days", "whole", low=1, high=366),),
    "drift": (_positive("mean_days_between_false_alarms"),),
    "stock_loss": (_positive("sigmas"),),
    "days_of_supply": (Key("low", "number", required=True, above=0.0),),
    "holding": (
        Key("high", "number", required=True, above=0.0),
        Key("counts", "choice", choices=("product", "active"), help="what is added up; left empty: product"),
        Key("from_strength", "number", above=0.0, help="a solution weaker than this counts zero; in its strength_basis"),
    ),
    "lot_age": (_positive("days"),),
    "strength_low": (Key("pct_below_certificate", "number", above=0.0, high=100.0),),
    "inactivation_ratio": (Key("low", "number", above=0.0),),
}
"""Keys of each kind of limit. One left out takes the default of the rule that judges it."""

OF_A_PARAMETER = frozenset({"bound", "held_below", "held_above", "share_of_month", "running_mean", "rate_of_change"})
"""Kinds of limit that mean nothing without a parameter."""

LIMIT_SUBJECTS = ("sample_point", "dosing_point", "vessel", "contact_segment", "meter", "product")

_DISPLAY = Key("label"), Key("decimals", "whole", low=0, high=6)

ALL = (
    Kind(
        "works",
        "The works",
        ("code",),
        (
            Key("name", required=True),
            Key("timezone", "timezone", required=True, help="IANA name, e.g. Europe/Berlin"),
            Key("operating_day_starts", "time", help="local, e.g. 07:00"),
            Key("units", "choice", choices=("si", "us"), help="what screens and paper show"),
            Key("censored_in_means", "choice", choices=("zero", "half", "full"), help="how <x enters a mean"),
            Key("round_to_limit", "flag", help="compare after rounding to the limit's own digits"),
            Key("address"),
            Key("owner"),
            Key("telephone", help="of the control room"),
        ),
    ),
    Kind("shift", "Shifts", ("name",), (Key("starts", "time", required=True, help="local"),)),
    Kind(
        "sample_point",
        "Sample points",
        ("code",),
        (_NAME, Key("stage", "choice", choices=("raw", "process", "entry", "network"))),
        site=True,
    ),
    Kind(
        "meter",
        "Meters",
        ("code",),
        (
            _NAME,
            Key("unit", "choice", required=True, choices=tuple(dict.fromkeys(WATER_UNITS + PRODUCT_UNITS))),
            Key("digits", "whole", low=1, high=15, help="it counts modulo 10 to this power"),
            _positive("max_flow_m3_per_h"),
            Key("accuracy_pct", "number", low=0.0, high=50.0, help="standard uncertainty of a volume"),
        ),
        site=True,
    ),
    Kind(
        "product",
        "Products",
        ("code",),
        (
            _NAME,
            Key("chemical", required=True, help="its formula, e.g. NaOCl"),
            _positive("strength", required=True),
            Key("strength_basis", "choice", required=True, choices=STRENGTH_BASES),
            Key("strength_as", "formula", help="what a weight % counts, e.g. CaO"),
            Key("density_kg_per_L", "number", low=0.3, high=3.0),
            Key(
                "strength_sd_pct",
                "number",
                low=0.0,
                high=50.0,
                help="standard uncertainty, % of the strength",
            ),
            Key("dose_basis", "dose_basis", help="product, active, Cl2 or a formula"),
            _positive("certified_maximum_mg_per_L", text="as product, from the product's own certificate"),
            _positive("shelf_life_days"),
            Key("storage_temperature_C", "number", low=-40.0, high=60.0),
            _from_zero("lead_time_days"),
            _positive("load_kg"),
            _from_zero("accepted_strength_low", text="a load below it needs a supervisor's acceptance, in strength_basis"),
            _positive("accepted_strength_high", text="a load above it likewise"),
            _from_zero("reserve_days"),
            Key("no_delivery_days", "weekdays"),
        ),
    ),
    Kind(
        "vessel",
        "Vessels",
        ("code",),
        (
            _NAME,
            Key("product", "code", required=True, refers="product"),
            Key("role", "choice", choices=("bulk", "day", "drum", "cylinder", "silo")),
            Key("shape", "choice", required=True, choices=tuple(SHAPES)),
            Key("level_sd_m", "number", above=0.0, high=5.0, help="standard uncertainty of one level reading"),
            Key(
                "level_factor",
                "number",
                low=0.3,
                high=3.0,
                help="true level ÷ reading: a pressure gauge set for water reads 1.335 times too high in 1.335 kg/L, so 0.749",
            ),
            _from_zero("heel_L", text="below the suction, not usable"),
            _from_zero("heel_kg"),
            Key("max_fill_pct", "number", above=0.0, high=100.0),
            Key("containment", help="vessels that share a bund bear the same name here"),
            Key("fill_line", help="vessels that share a fill line bear the same name here"),
            Key("fed_from", "code", refers="vessel", help="the vessel it is filled from"),
        ),
        site=True,
        extra=SHAPES,
    ),
    Kind(
        "dosing_point",
        "Dosing points",
        ("code",),
        (
            _NAME,
            Key("product", "code", required=True, refers="product"),
            Key("vessels", "refs", required=True, refers="vessel", help="the last measured vessels"),
            Key("meter", "code", required=True, refers="meter", help="of the water treated"),
            Key("feed_meter", "code", refers="meter", help="of the product fed"),
            Key("before", "code", refers="sample_point", help="upstream: what the need is computed from"),
            Key("sample_point", "code", refers="sample_point", help="where its effect is read"),
            Key("need", "need"),
        ),
        site=True,
    ),
    Kind(
        "design_dose",
        "Design doses",
        ("dosing_point",),
        (_from_zero("dose_mg_per_L", required=True, text="in the product's dose basis"),),
    ),
    Kind(
        "limit",
        "Limits",
        ("code",),
        (
            *(Key(subject, "code", refers=subject) for subject in LIMIT_SUBJECTS),
            Key("parameter"),
            Key("kind", "choice", required=True, choices=tuple(LIMIT_KINDS)),
            Key("level", "choice", required=True, choices=("target", "alert", "action", "regulatory")),
            Key("unit"),
            Key("source", help="who or what sets it"),
            Key("tell", "tell", help="who must be told, within how many hours"),
            Key("decimals", "whole", low=0, high=6, help="the limit's own digits"),
        ),
        extra=LIMIT_KINDS,
    ),
    Kind(
        "round_line",
        "Round",
        ("site", "parameter"),
        (
            Key("site", "code", required=True, refers="site"),
            Key("parameter", required=True),
            Key("due", "due", help="shift, day, week, month, or weekdays"),
            Key("order", "number", low=0, help="place in walking order"),
        ),
        kept=True,
    ),
    Kind(
        "state",
        "In service",
        ("vessel", "dosing_point", "works"),
        (Key("is", "choice", required=True, choices=("in_service", "standby", "off")),),
    ),
    Kind(
        "contact_segment",
        "Contact segments",
        ("code",),
        (
            _positive("volume_m3", required=True, text="at the minimum operating level"),
            Key("baffling_factor", "number", required=True, above=0.0, high=1.0),
            Key("peak_flow_meter", "code", required=True, refers="meter"),
            Key("sample_point", "code", required=True, refers="sample_point"),
            _from_zero("required_log_giardia"),
            _from_zero("required_log_virus"),
        ),
    ),
    Kind(
        "parameter",
        "Own parameters",
        ("name",),
        (
            Key("unit", required=True),
            *_DISPLAY,
            Key("low", "number", help="physically possible"),
            Key("high", "number", help="physically possible"),
            Key("usual_low", "number"),
            Key("usual_high", "number"),
        ),
    ),
    Kind(
        "opening_stock",
        "Opening stock",
        ("vessel",),
        (
            Key("timestamp", "moment", required=True),
            _positive("strength", required=True),
            Key("strength_basis", "choice", required=True, choices=STRENGTH_BASES),
            Key("density_kg_per_L", "number", low=0.3, high=3.0),
            Key("lot"),
            Key("manufactured_on", "date"),
        ),
    ),
    Kind(
        "call",
        "The call list",
        ("code",),
        (
            Key("name", required=True),
            Key("telephone"),
            Key("email", help="mail is sent where a mail server is set up"),
            Key("level", "choice", choices=("alert", "action", "regulatory"), help="the mildest worth it; left empty: action"),
            Key("minutes", "whole", low=0, high=10_000, help="so long nobody has taken it on: then this one's turn"),
            Key("from", "time", help="on call from, local; left empty: always"),
            Key("to", "time", help="on call to"),
            Key("digest", "flag", help="a mail each morning with all that is open"),
        ),
    ),
    Kind(
        "report",
        "The monthly report",
        ("form",),
        (
            Key("regulator"),
            Key("regulator_address"),
            Key("permit_number"),
            Key("approval_reference", help="of this form; without one it says: not the regulator's form"),
            Key("wording", help="the works' own sentence above the signatures"),
            Key("due_day", "whole", low=1, high=28, help="of the following month"),
            Key("sections", "words", help="in this order; left empty: all but cost"),
            Key("undetectable_below_mg_per_L", "number", low=0.0, high=5.0, help="a residual in the network below it is none"),
            Key("page", "choice", choices=("A4", "Letter"), help="left empty: A4, or Letter with US units"),
        ),
    ),
    Kind(
        "membership",
        "People",
        ("username",),
        (
            Key(
                "role",
                "choice",
                required=True,
                choices=("operator", "supervisor", "manager", "inspector", "administrator"),
            ),
            Key("may_prepare", "flag"),
            Key("may_certify", "flag"),
            Key("licence_number"),
            Key("licence_class"),
        ),
        page=False,
    ),
)
KINDS: dict[str, Kind] = {kind.name: kind for kind in ALL}
SITES = tuple(kind.name for kind in ALL if kind.site)
"""Kinds whose codes a record may name as its site; one code names one site only."""
