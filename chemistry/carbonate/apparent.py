"""Equilibrium constants between concentrations at one ionic strength, by either activity model."""

from chemistry import activity as activities
from chemistry.constants import Values

_LN10_TENTH = activities.LN10 / 10.0  # neutral species: log10 gamma = 0.1 I, PHREEQC's default


class Apparent:
    """Concentration constants at one ionic strength; each is named after the species it makes."""

    brucite: Values
    caco3: Values
    cahco3: Values
    calcite: Values
    caoh: Values
    caso4: Values
    co2: Values
    gammas: Values
    h: Values
    hco3: Values
    hso4: Values
    kso4: Values
    mgco3: Values
    mghco3: Values
    mgoh: Values
    mgso4: Values
    naco3: Values
    nahco3: Values
    naso4: Values
    ocl: Values
    oh: Values


def _apparent_davies(xp: Values, k: Values, ionic: Values) -> Apparent:
    root = xp.sqrt(ionic)
    neutral = xp.exp(_LN10_TENTH * ionic)
    one = xp.exp(-k.a_natural * (root / (1.0 + root) - 0.3 * ionic))
    two = one * one
    two = two * two
    step = two / one
    charged_pair = two * step
    neutral_pair = two * two / neutral
    out = Apparent()
    out.h = 1.0 / one
    out.oh = k.kw / one
    out.hco3 = step / k.k2
    out.co2 = two / (neutral * k.k1 * k.k2)
    out.cahco3 = k.cahco3 / k.k2 * charged_pair
    out.caco3 = k.caco3_aq * neutral_pair
    out.caso4 = k.caso4 * neutral_pair
    out.caoh = k.caoh * step
    out.mghco3 = k.mghco3 * charged_pair
    out.mgco3 = k.mgco3_aq * neutral_pair
    out.mgso4 = k.mgso4 * neutral_pair
    out.mgoh = k.mgoh * step
    out.nahco3 = k.nahco3 / k.k2 * one * two / neutral
    out.naco3 = k.naco3 * two
    out.naso4 = k.naso4 * two
    out.kso4 = k.kso4 * two
    out.hso4 = k.hso4 * step
    out.ocl = k.hocl * neutral / one
    out.calcite = k.calcite / (two * two)
    out.brucite = k.brucite / two
    out.gammas = (one, two, one, two, neutral)
    return out


def _apparent_phreeqc(xp: Values, k: Values, ionic: Values) -> Apparent:
    root = xp.sqrt(ionic)
    neutral = xp.exp(_LN10_TENTH * ionic)
    ar = -k.a_natural * root
    br = k.b * root
    bi = activities.LN10 * ionic
    exp = xp.exp

    def gamma(name: str, charge_squared: Values) -> Values:
        size, b = activities.ION_SIZE_AND_B[name]
        exponent = charge_squared * ar / (1.0 + size * br)
        return exp(exponent + b * bi if b else exponent)

    davies = exp(ar / (1.0 + root) + 0.3 * k.a_natural * ionic)
    hydrogen = gamma("H+", 1.0)
    calcium = gamma("Ca+2", 4.0)
    magnesium = gamma("Mg+2", 4.0)
    sodium = gamma("Na+", 1.0)
    so4 = gamma("SO4-2", 4.0)
    hco3 = gamma("HCO3-", 1.0)  # NaSO4- and KSO4- share its size and b
    co3 = hco3 * hco3
    co3 = co3 * co3  # CO3-2 has the same size, b = 0 and twice the charge
    out = Apparent()
    out.h = 1.0 / hydrogen
    out.oh = k.kw / gamma("OH-", 1.0)
    out.hco3 = co3 / (hco3 * k.k2)
    out.co2 = co3 / (neutral * k.k1 * k.k2)
    out.cahco3 = k.cahco3 / k.k2 * calcium * co3 / gamma("CaHCO3+", 1.0)
    out.caco3 = k.caco3_aq * calcium * co3 / neutral
    out.caso4 = k.caso4 * calcium * so4 / neutral
    out.caoh = k.caoh * calcium / davies
    out.mghco3 = k.mghco3 * magnesium * co3 / gamma("MgHCO3+", 1.0)
    out.mgco3 = k.mgco3_aq * magnesium * co3 / neutral
    out.mgso4 = k.mgso4 * magnesium * so4 / neutral
    out.mgoh = k.mgoh * magnesium / gamma("MgOH+", 1.0)
    out.nahco3 = k.nahco3 / k.k2 * sodium * co3 / neutral
    out.naco3 = k.naco3 * sodium * co3 / davies
    out.naso4 = k.naso4 * sodium * so4 / hco3
    out.kso4 = k.kso4 * gamma("K+", 1.0) * so4 / hco3
    out.hso4 = k.hso4 * so4 / davies
    out.ocl = k.hocl * neutral / davies
    out.calcite = k.calcite / (calcium * co3)
    out.brucite = k.brucite / magnesium
    out.gammas = (hydrogen, calcium, hco3, co3, neutral)
    return out


OF_MODEL = {activities.DAVIES: _apparent_davies, activities.PHREEQC: _apparent_phreeqc}
