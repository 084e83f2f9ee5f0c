"""The sums over all species at given h (activity of H+), c (free CO3) and s (free SO4), and their slopes.

Free metals follow in closed form from h, c and s, or from the solubility product where the solid is present.
Slopes are taken with respect to u = ln h and v = ln c, at constant s and ionic strength. Definitions of
alkalinity and the species: Stumm and Morgan, Aquatic Chemistry (key STUMM-MORGAN, from memory).
"""

from dataclasses import dataclass

from chemistry.constants import Values

ABSENT = 0.0


@dataclass(slots=True)
class Solved:
    """Concentrations in mol/L after :func:`solve`; ``h`` is the activity of H+."""

    h: Values
    ionic_strength: Values
    carbon: Values
    alkalinity: Values
    calcium: Values  # total dissolved
    magnesium: Values
    hydrogen: Values
    hydroxide: Values
    hco3: Values
    co3: Values
    co2: Values
    ca: Values
    cahco3: Values
    caco3: Values
    caso4: Values
    caoh: Values
    mg: Values
    mghco3: Values
    mgco3: Values
    mgso4: Values
    mgoh: Values
    na: Values
    nahco3: Values
    naco3: Values
    naso4: Values
    k: Values
    kso4: Values
    so4: Values
    hso4: Values
    hypochlorite: Values
    ion_product_calcite: Values  # {Ca}{CO3} / Ksp
    ion_product_brucite: Values  # {Mg}/{H}^2 / K
    pco2: Values  # atm
    gammas: Values


class State:
    """Sums and slopes at one (h, c, s); made by :func:`evaluate`."""

    alkalinity: Values
    alkalinity_u: Values
    alkalinity_v: Values
    c: Values
    ca: Values
    calcium: Values
    carbon: Values
    carbon_u: Values
    carbon_v: Values
    co2: Values
    h: Values
    hco3: Values
    hso4: Values
    hydrogen: Values
    ionic_u: Values
    ionic_v: Values
    magnesium: Values
    mg: Values
    monovalent: Values
    na: Values
    ocl: Values
    oh: Values
    s: Values


def evaluate(ap: Values, t: Values, h: Values, c: Values, s: Values, calcite: bool, brucite: bool, with_u: bool) -> State:
    """:class:`State` for apparent constants ``ap`` and totals ``t``; slopes in u only ``with_u``.

    With a solid the balances are those the solid leaves unchanged: carbon less its calcium, alkalinity less
    twice its metal.
    """
    st = State()
    hc = h * c
    inverse = 1.0 / h
    hco3 = ap.hco3 * hc
    co2 = ap.co2 * hc * h
    hydrogen = ap.h * h
    oh = ap.oh * inverse
    hso4 = ap.hso4 * h * s

    f_h = ap.cahco3 * hc
    f_c = ap.caco3 * c
    f_o = ap.caoh * inverse
    dv = f_h + f_c
    part = dv + f_c
    whole = part + f_o
    denominator = dv + ap.caso4 * s + f_o + 1.0
    if calcite:
        ca = ap.calcite / c
        calcium = ca * denominator
        carbon = dv * ca - calcium
        alkalinity = whole * ca - 2.0 * calcium
        # ln ca falls with ln c, one for one
        carbon_v = calcium - ca * dv
        alkalinity_v = -ca * f_o + 2.0 * carbon_v
        ca_v = -ca
    else:
        calcium = t.calcium
        ca = calcium / denominator
        slope = dv / denominator
        carbon = dv * ca
        alkalinity = whole * ca
        carbon_v = carbon * (1.0 - slope)
        alkalinity_v = ca * part - alkalinity * slope
        ca_v = -ca * slope
    monovalent = (f_h + f_o) * ca
    if with_u:
        du = f_h - f_o
        if calcite:
            carbon_u = ca * (f_h - du)
            alkalinity_u = -ca * du
            ca_u = 0.0 * ca
        else:
            slope = du / denominator
            carbon_u = ca * f_h - carbon * slope
            alkalinity_u = ca * du - alkalinity * slope
            ca_u = -ca * slope
    st.ca, st.calcium = ca, calcium

    f_h = ap.mghco3 * hc
    f_c = ap.mgco3 * c
    f_o = ap.mgoh * inverse
    dv = f_h + f_c
    part = dv + f_c
    whole = part + f_o
    denominator = dv + ap.mgso4 * s + f_o + 1.0
    if brucite:
        mg = ap.brucite * h * h
        magnesium = mg * denominator
        carbon = carbon + dv * mg
        alkalinity = alkalinity + whole * mg - 2.0 * magnesium
        carbon_v = carbon_v + mg * dv
        alkalinity_v = alkalinity_v + mg * (part - 2.0 * dv)
        mg_v = 0.0 * mg
    else:
        magnesium = t.magnesium
        mg = magnesium / denominator
        slope = dv / denominator
        own_carbon = dv * mg
        own_alkalinity = whole * mg
        carbon = carbon + own_carbon
        alkalinity = alkalinity + own_alkalinity
        carbon_v = carbon_v + own_carbon * (1.0 - slope)
        alkalinity_v = alkalinity_v + mg * part - own_alkalinity * slope
        mg_v = -mg * slope
    monovalent = monovalent + (f_h + f_o) * mg
    if with_u:
        du = f_h - f_o
        if brucite:
            # ln mg rises with ln h, two for one
            carbon_u = carbon_u + mg * (f_h + 2.0 * dv)
            alkalinity_u = alkalinity_u + mg * (du + 2.0 * whole - 2.0 * du) - 4.0 * magnesium
            mg_u = 2.0 * mg
        else:
            slope = du / denominator
            carbon_u = carbon_u + mg * f_h - own_carbon * slope
            alkalinity_u = alkalinity_u + mg * du - own_alkalinity * slope
            mg_u = -mg * slope
    st.mg, st.magnesium = mg, magnesium

    f_h = ap.nahco3 * hc
    f_c = ap.naco3 * c
    dv = f_h + f_c
    denominator = dv + ap.naso4 * s + 1.0
    na = t.sodium / denominator
    slope = dv / denominator
    own_carbon = dv * na
    own_alkalinity = own_carbon + f_c * na
    carbon = carbon + own_carbon
    alkalinity = alkalinity + own_alkalinity
    carbon_v = carbon_v + own_carbon * (1.0 - slope)
    alkalinity_v = alkalinity_v + own_alkalinity * (1.0 - slope)
    monovalent = monovalent + t.sodium - f_h * na
    if with_u:
        slope = f_h / denominator
        carbon_u = carbon_u + na * f_h - own_carbon * slope
        alkalinity_u = alkalinity_u + na * f_h - own_alkalinity * slope
    st.na = na

    if type(t.free_chlorine) is float and t.free_chlorine == ABSENT:
        ocl = ABSENT
    else:
        ratio = ap.ocl * inverse
        ocl = t.free_chlorine * ratio / (1.0 + ratio)
        if with_u:
            alkalinity_u = alkalinity_u - ocl / (1.0 + ratio)
        alkalinity = alkalinity + ocl
        monovalent = monovalent + ocl
    single = hco3 + c
    both = single + co2
    double = single + c
    st.carbon = carbon + both
    st.carbon_v = carbon_v + both
    st.alkalinity = alkalinity + double + oh - hydrogen - hso4
    st.alkalinity_v = alkalinity_v + double
    st.monovalent = monovalent + hydrogen + oh + hco3 + hso4
    st.ionic_v = 0.5 * hco3 + 2.0 * (c + ca_v + mg_v)
    if with_u:
        st.carbon_u = carbon_u + hco3 + co2 + co2
        st.alkalinity_u = alkalinity_u + hco3 - oh - hydrogen - hso4
        st.ionic_u = 0.5 * (hco3 + hydrogen - oh) + 2.0 * (ca_u + mg_u)
    st.h, st.c, st.s = h, c, s
    st.hco3, st.co2, st.hydrogen, st.oh, st.hso4, st.ocl = hco3, co2, hydrogen, oh, hso4, ocl
    return st


def renewed(ap: Values, t: Values, st: Values) -> Values:
    """Free sulfate and ionic strength that follow from a :class:`State`."""
    bound = 1.0 + ap.caso4 * st.ca + ap.mgso4 * st.mg + ap.naso4 * st.na + ap.hso4 * st.h
    if not (type(t.potassium) is float and t.potassium == ABSENT):
        bound = bound + ap.kso4 * (t.potassium / (1.0 + ap.kso4 * st.s))
    s = t.sulfate / bound
    spectators = t.potassium + t.chloride + t.other_charge
    return s, 0.5 * (st.monovalent + spectators) + 2.0 * (st.c + s + st.ca + st.mg)


def solved(ap: Values, t: Values, st: Values, ionic: Values, calcite: bool, brucite: bool, henry: Values) -> Solved:
    """:class:`Solved` from the last :class:`State`: every species by itself."""
    h, c, s, ca, mg, na = st.h, st.c, st.s, st.ca, st.mg, st.na
    hc = h * c
    inverse = 1.0 / h
    k_free = t.potassium / (1.0 + ap.kso4 * s)
    carbon, alkalinity = st.carbon, st.alkalinity
    if calcite:
        carbon = carbon + st.calcium
        alkalinity = alkalinity + 2.0 * st.calcium
    if brucite:
        alkalinity = alkalinity + 2.0 * st.magnesium
    return Solved(
        h=h, ionic_strength=ionic, carbon=carbon, alkalinity=alkalinity, calcium=st.calcium, magnesium=st.magnesium,
        hydrogen=st.hydrogen, hydroxide=st.oh, hco3=st.hco3, co3=c, co2=st.co2,
        ca=ca, cahco3=ap.cahco3 * hc * ca, caco3=ap.caco3 * c * ca, caso4=ap.caso4 * s * ca,
        caoh=ap.caoh * inverse * ca,
        mg=mg, mghco3=ap.mghco3 * hc * mg, mgco3=ap.mgco3 * c * mg, mgso4=ap.mgso4 * s * mg,
        mgoh=ap.mgoh * inverse * mg,
        na=na, nahco3=ap.nahco3 * hc * na, naco3=ap.naco3 * c * na, naso4=ap.naso4 * s * na,
        k=k_free, kso4=t.potassium - k_free, so4=s, hso4=st.hso4, hypochlorite=st.ocl,
        ion_product_calcite=ca * c / ap.calcite, ion_product_brucite=mg * inverse * inverse / ap.brucite,
        pco2=st.co2 * ap.gammas[4] / henry,
        gammas=ap.gammas,
    )  # fmt: skip
