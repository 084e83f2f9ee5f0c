"""Hypothesis strategies for waters a works might meet, and some it won't."""

from hypothesis import strategies as st

from chemistry import carbonate


def _between(low, high):
    return st.floats(low, high, allow_nan=False, allow_infinity=False)


MODEL = st.sampled_from(["davies", "phreeqc"])
IONS = {
    "calcium_mg_l": _between(0.5, 400.0),
    "magnesium_mg_l": _between(0.0, 150.0),
    "sodium_mg_l": _between(0.0, 600.0),
    "potassium_mg_l": _between(0.0, 30.0),
    "chloride_mg_l": _between(0.0, 800.0),
    "sulfate_mg_l": _between(0.0, 600.0),
    "nitrate_mg_l": _between(0.0, 60.0),
}
WATER = st.builds(
    carbonate.Water,
    temperature_c=_between(0.0, 60.0),
    ph=_between(5.5, 9.5),
    alkalinity_mg_l_caco3=_between(15.0, 600.0),
    **IONS,
)
ACID_TO_LIME = st.builds(
    carbonate.Water, temperature_c=_between(0.0, 60.0), ph=_between(4.0, 12.0), dic_mmol_l=_between(0.02, 30.0), **IONS
)
