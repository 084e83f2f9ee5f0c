"""The solver: carbonate equilibrium with ion pairs, for one water or an array of waters.

The unknowns are the activity h of H+ and the concentration c of free CO3. For given h, c and free sulfate s the free
metals follow in closed form (or from the solubility product, where calcite or brucite is present), so that two
equations remain, solved by Newton's method in ln h and ln c with limited steps. Ionic strength and s are renewed in
each step. Waters that have not settled after the allowed steps are solved again by bracketing the pH, which can't fail
where an answer exists. Definitions of alkalinity and the species: Stumm and Morgan, Aquatic Chemistry (key
STUMM-MORGAN, from memory); the species set is that of phreeqc.dat for these elements, without CaHSO4+ and (CO2)2.
"""

import math
from dataclasses import dataclass
from types import SimpleNamespace

import numpy as np

from chemistry import activity as activities
from chemistry import errors
from chemistry.carbonate import constants_of_equilibrium

ALKALINITY, CARBON, CO2 = "alkalinity", "carbon", "co2"
_TOLERANCE = 1e-9
_MOST_STEPS = 40
_LOWEST_H, _HIGHEST_H = 1e-13, 1e-3
_TINY = 1e-300

_SCALAR = SimpleNamespace(
    exp=math.exp,
    sqrt=math.sqrt,
    least=min,
    most=max,
    largest=lambda value: value,
    where=lambda condition, yes, no: yes if condition else no,
)
_ARRAY = SimpleNamespace(
    exp=np.exp,
    sqrt=np.sqrt,
    least=np.minimum,
    most=np.maximum,
    largest=lambda value: float(np.max(value)) if np.size(value) else 0.0,
    where=np.where,
)


@dataclass(slots=True)
class Solved:
    """Concentrations in mol/L after :func:`solve`; ``h`` is the activity of H+."""

    h: object
    ionic_strength: object
    carbon: object
    alkalinity: object
    calcium: object  # total dissolved
    magnesium: object
    hydrogen: object
    hydroxide: object
    hco3: object
    co3: object
    co2: object
    ca: object
    cahco3: object
    caco3: object
    caso4: object
    caoh: object
    mg: object
    mghco3: object
    mgco3: object
    mgso4: object
    mgoh: object
    na: object
    nahco3: object
    naco3: object
    naso4: object
    k: object
    kso4: object
    so4: object
    hso4: object
    hypochlorite: object
    ion_product_calcite: object  # {Ca}{CO3} / Ksp
    ion_product_brucite: object  # {Mg}/{H}^2 / K
    gammas: object


class _Apparent:
    """Concentration constants at one ionic strength; each is named after the species it makes."""

    __slots__ = (
        "h", "oh", "hco3", "co2", "cahco3", "caco3", "caso4", "caoh", "mghco3", "mgco3", "mgso4", "mgoh",
        "nahco3", "naco3", "naso4", "kso4", "hso4", "ocl", "calcite", "brucite", "gammas",
    )  # fmt: skip


def _apparent_davies(xp, k, ionic):
    root = xp.sqrt(ionic)
    neutral = xp.exp(_LN10_TENTH * ionic)
    one = xp.exp(-k.a_natural * (root / (1.0 + root) - 0.3 * ionic))
    two = one * one
    two = two * two
    step = two / one
    charged_pair = two * step
    neutral_pair = two * two / neutral
    out = _Apparent()
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


def _apparent_phreeqc(xp, k, ionic):
    root = xp.sqrt(ionic)
    neutral = xp.exp(_LN10_TENTH * ionic)
    ar = -k.a_natural * root
    br = k.b * root
    bi = activities.LN10 * ionic
    exp = xp.exp

    def gamma(name, charge_squared):
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
    out = _Apparent()
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


_APPARENT = {activities.DAVIES: _apparent_davies, activities.PHREEQC: _apparent_phreeqc}


class _Metal:
    """One metal at given h, c, s: its free ion, its species, and what it adds to each balance and its slopes."""

    __slots__ = ("free", "hco3", "co3", "so4", "oh", "denominator", "lu", "lv", "du", "dv", "total")

    def __init__(self, f_hco3, f_co3, f_so4, f_oh, total, solid):
        denominator = 1.0 + f_hco3 + f_co3 + f_so4 + f_oh
        du = f_hco3 - f_oh
        dv = f_hco3 + f_co3
        if solid is None:
            free = total / denominator
            self.lu = -du / denominator
            self.lv = -dv / denominator
            self.total = total
        else:
            free, self.lu, self.lv = solid
            self.total = free * denominator
        self.free = free
        self.hco3 = f_hco3 * free
        self.co3 = f_co3 * free
        self.so4 = f_so4 * free
        self.oh = f_oh * free
        self.denominator = denominator
        self.du = du
        self.dv = dv


def solve(totals, model, *, calcite=False, brucite=False, co2_activity=None, start=None):
    """Speciate ``totals`` (see waters.Totals); returns :class:`Solved`.

    Which two of h, alkalinity and carbon stand in ``totals`` decides what is found. With ``calcite`` or ``brucite``
    the water is brought to equilibrium with that solid (dissolving or forming it): calcium, magnesium, carbon and
    alkalinity in the result are what stays dissolved. ``co2_activity`` (mol/kg) takes the place of carbon for a water
    in equilibrium with a gas. ``start`` is an earlier Solved to begin from. Raises ChemistryError where no answer
    exists between pH 3 and 13, or the ionic strength passes 0.5 mol/L.
    """
    activities.require_model(model)
    scalar = not any(isinstance(getattr(totals, name), np.ndarray) for name in totals.__slots__)
    if scalar and isinstance(co2_activity, np.ndarray):
        scalar = False
    xp = _SCALAR if scalar else _ARRAY
    constants = constants_of_equilibrium.at(totals.temperature_c)
    problem = _Problem(xp, constants, _APPARENT[model], totals, calcite, brucite, co2_activity)
    if scalar:
        try:
            solved, error = problem.newton(start)
        except (ZeroDivisionError, OverflowError, ValueError):
            solved, error = None, math.inf
        if not error < _TOLERANCE:
            solved = problem.bracketed()
    else:
        with np.errstate(all="ignore"):
            solved, error = problem.newton(start)
        failed = np.broadcast_to(~(np.asarray(error) < _TOLERANCE), _shape(totals, co2_activity))
        if failed.any():
            solved = _mend(solved, failed, totals, constants, model, calcite, brucite, co2_activity)
    _require_sense(solved)
    return solved


def log10(value):
    """Log10 of a number or an array; minus infinity at zero (a metal that is absent)."""
    if type(value) is float:
        return math.log10(value) if value > 0.0 else -math.inf
    with np.errstate(divide="ignore"):
        return np.log10(value)


def _require_sense(solved):
    errors.require("ionic strength", solved.ionic_strength, "mol/L", 0.0, 0.5, "Davies 1962")
    errors.require("activity of H+ (10^-pH)", solved.h, "", _LOWEST_H * 0.999, _HIGHEST_H * 1.001, "model, pH 3 to 13")


class _Problem:
    """One call of :func:`solve`."""

    def __init__(self, xp, constants, apparent, totals, calcite, brucite, co2_activity):
        self.xp = xp
        self.k = constants
        self.apparent = apparent
        self.t = totals
        self.calcite = calcite
        self.brucite = brucite
        self.co2_activity = co2_activity
        self.fixed_h = totals.h is not None
        carbon, alkalinity = totals.carbon, totals.alkalinity
        if calcite and carbon is not None:
            carbon = carbon - totals.calcium
        if alkalinity is not None:
            if calcite:
                alkalinity = alkalinity - 2.0 * totals.calcium
            if brucite:
                alkalinity = alkalinity - 2.0 * totals.magnesium
        self.carbon_target = carbon
        self.alkalinity_target = alkalinity

    def newton(self, start):
        """Return (Solved, size of the last step)."""
        xp = self.xp
        t = self.t
        h, c, s, ionic = self._start(start)
        apparent = self.apparent(xp, self.k, ionic)
        step = None
        best = None
        for _ in range(_MOST_STEPS):
            species = self._species(apparent, h, c, s)
            new_s, new_ionic = self._renewed(species, apparent, h, s)
            if self.fixed_h:
                dv = xp.most(-0.9, xp.least(9.0, self._one_step(species)))
                c = c * (1.0 + dv)
                step = abs(dv)
                new_ionic = new_ionic + self._ionic_slope_v(species) * xp.least(dv, 1.0)
            else:
                du, dv = self._two_steps(species)
                size = abs(du) + abs(dv)
                limit = xp.least(1.0, 2.0 / xp.most(size, 1e-12))
                h = xp.least(1e-1, xp.most(1e-15, h * xp.exp(du * limit)))
                c = xp.most(_TINY, c * xp.exp(dv * limit))
                step = size
                ahead = self._ionic_slope_u(species) * du + self._ionic_slope_v(species) * dv
                new_ionic = new_ionic + ahead * limit
            new_ionic = xp.most(new_ionic, 0.3 * ionic)
            step = step + abs(new_ionic - ionic) / new_ionic + abs(new_s - s) / (t.sulfate + 1e-9)
            s, ionic = new_s, new_ionic
            best = species
            if xp.largest(step) < _TOLERANCE:
                break
            apparent = self.apparent(xp, self.k, ionic)
        return self._solved(best, apparent, ionic, step), step

    def _start(self, start):
        xp, t = self.xp, self.t
        if start is not None:
            c = start.co3
            if self.calcite:
                c = c / xp.sqrt(xp.most(1e-4, xp.least(start.ion_product_calcite, 1e4)))
            return start.h, c, start.so4, start.ionic_strength
        weak = abs(t.alkalinity) if t.alkalinity is not None else t.carbon
        ionic = 0.5 * (
            4.0 * (t.calcium + t.magnesium + t.sulfate) + t.sodium + t.potassium + t.chloride + t.other_charge + weak
        )
        ionic = xp.least(0.6, xp.most(ionic, 1e-6))
        k = self.k
        if self.fixed_h:
            h = t.h
            if t.carbon is not None:
                c = t.carbon / (1.0 + h / k.k2 + h * h / (k.k1 * k.k2))
            else:
                c = xp.most(t.alkalinity + h - k.kw / h, 1e-12) / (h / k.k2 + 2.0)
        elif self.co2_activity is not None:
            h = k.k1 * self.co2_activity / xp.most(t.alkalinity, 1e-6)
            h = xp.least(1e-4, xp.most(1e-11, h))
            c = self.co2_activity * k.k1 * k.k2 / (h * h)
        else:
            a, carbon = t.alkalinity, t.carbon
            some = xp.most(a, 1e-8)
            lack = a - carbon
            inside = (k.k1 * lack) * (k.k1 * lack) - 4.0 * some * k.k1 * k.k2 * (a - 2.0 * carbon)
            h = (xp.sqrt(xp.most(inside, 0.0)) - k.k1 * lack) / (2.0 * some)
            h = xp.where(a > 1.95 * carbon, k.kw / xp.most(a - 1.9 * carbon, 1e-6), h)
            h = xp.least(10**-3.5, xp.most(10**-12.5, h))
            c = carbon / (1.0 + h / k.k2 + h * h / (k.k1 * k.k2))
        return h, xp.most(c, 1e-20), t.sulfate, ionic

    def _species(self, ap, h, c, s):
        t = self.t
        hc = h * c
        inverse = 1.0 / h
        calcium = _Metal(
            ap.cahco3 * hc, ap.caco3 * c, ap.caso4 * s, ap.caoh * inverse, t.calcium,
            (ap.calcite / c, 0.0, -1.0) if self.calcite else None,
        )  # fmt: skip
        magnesium = _Metal(
            ap.mghco3 * hc, ap.mgco3 * c, ap.mgso4 * s, ap.mgoh * inverse, t.magnesium,
            (ap.brucite * h * h, 2.0, 0.0) if self.brucite else None,
        )  # fmt: skip
        sodium = _Metal(ap.nahco3 * hc, ap.naco3 * c, ap.naso4 * s, 0.0, t.sodium, None)
        hco3 = ap.hco3 * hc
        co2 = ap.co2 * hc * h
        ratio = ap.ocl * inverse
        ocl = t.free_chlorine * ratio / (1.0 + ratio)
        hso4 = ap.hso4 * h * s
        return h, c, s, hco3, co2, ap.h * h, ap.oh * inverse, hso4, ocl, ratio, calcium, magnesium, sodium

    def _balances(self, species):
        """Carbon and alkalinity in solution."""
        _, c, _, hco3, co2, hydrogen, oh, hso4, ocl, _, ca, mg, na = species
        carbon = hco3 + co2 + c + ca.hco3 + ca.co3 + mg.hco3 + mg.co3 + na.hco3 + na.co3
        alkalinity = (
            hco3 + 2.0 * (c + ca.co3 + mg.co3 + na.co3) + oh - hydrogen + ca.hco3 + mg.hco3 + na.hco3
            + ca.oh + mg.oh - hso4 + ocl
        )  # fmt: skip
        return carbon, alkalinity

    def _misses(self, species):
        """How far the two balances are from their targets (the second element is that of the alkalinity)."""
        carbon, alkalinity = self._balances(species)
        ca, mg = species[10], species[11]
        if self.calcite:
            carbon = carbon - ca.total
            alkalinity = alkalinity - 2.0 * ca.total
        if self.brucite:
            alkalinity = alkalinity - 2.0 * mg.total
        first = carbon - self.carbon_target if self.carbon_target is not None else None
        second = alkalinity - self.alkalinity_target if self.alkalinity_target is not None else None
        return first, second

    def _carbon_slopes(self, species):
        _, c, _, hco3, co2, _, _, _, _, _, ca, mg, na = species
        u = hco3 + 2.0 * co2
        v = hco3 + co2 + c
        for metal in (ca, mg, na):
            both = metal.hco3 + metal.co3
            u = u + metal.hco3 + both * metal.lu
            v = v + both * (1.0 + metal.lv)
        if self.calcite:
            u = u - ca.free * (ca.du + ca.denominator * ca.lu)
            v = v - ca.free * (ca.dv + ca.denominator * ca.lv)
        return u, v

    def _alkalinity_slope_v(self, species):
        _, c, _, hco3, _, _, _, _, _, _, ca, mg, na = species
        v = hco3 + 2.0 * c
        for metal in (ca, mg, na):
            part = metal.hco3 + 2.0 * metal.co3
            v = v + part + (part + metal.oh) * metal.lv
        if self.calcite:
            v = v - 2.0 * ca.free * (ca.dv + ca.denominator * ca.lv)
        if self.brucite:
            v = v - 2.0 * mg.free * (mg.dv + mg.denominator * mg.lv)
        return v

    def _alkalinity_slope_u(self, species):
        _, _, _, hco3, _, hydrogen, oh, hso4, ocl, ratio, ca, mg, na = species
        u = hco3 - oh - hydrogen - hso4 - ocl / (1.0 + ratio)
        for metal in (ca, mg, na):
            u = u + metal.hco3 - metal.oh + (metal.hco3 + 2.0 * metal.co3 + metal.oh) * metal.lu
        if self.calcite:
            u = u - 2.0 * ca.free * (ca.du + ca.denominator * ca.lu)
        if self.brucite:
            u = u - 2.0 * mg.free * (mg.du + mg.denominator * mg.lu)
        return u

    def _one_step(self, species):
        miss_carbon, miss_alkalinity = self._misses(species)
        if miss_carbon is not None:
            return -miss_carbon / self._carbon_slopes(species)[1]
        return -miss_alkalinity / self._alkalinity_slope_v(species)

    def _two_steps(self, species):
        miss_first, miss_second = self._misses(species)
        if self.co2_activity is not None:
            co2 = species[4]
            miss_first = co2 - self.co2_activity / self._neutral
            first_u, first_v = 2.0 * co2, co2
        else:
            first_u, first_v = self._carbon_slopes(species)
        second_u = self._alkalinity_slope_u(species)
        second_v = self._alkalinity_slope_v(species)
        determinant = first_u * second_v - first_v * second_u
        du = (first_v * miss_second - second_v * miss_first) / determinant
        dv = (second_u * miss_first - first_u * miss_second) / determinant
        return du, dv

    @staticmethod
    def _ionic_slope_u(species):
        """Change of ionic strength with ln h, the main terms: it only has to foresee the next step."""
        _, _, _, hco3, _, hydrogen, oh, _, _, _, ca, mg, _ = species
        return 0.5 * (hco3 + hydrogen - oh) + 2.0 * (ca.free * ca.lu + mg.free * mg.lu)

    @staticmethod
    def _ionic_slope_v(species):
        """Change of ionic strength with ln c, the main terms."""
        _, c, _, hco3, _, _, _, _, _, _, ca, mg, _ = species
        return 0.5 * hco3 + 2.0 * (c + ca.free * ca.lv + mg.free * mg.lv)

    def _renewed(self, species, ap, h, s):
        """Free sulfate and ionic strength that follow from the species."""
        t = self.t
        _, c, _, hco3, _, hydrogen, oh, hso4, ocl, _, ca, mg, na = species
        self._neutral = ap.gammas[4]
        f_k = ap.kso4 * s
        k_free = t.potassium / (1.0 + f_k)
        new_s = t.sulfate / (
            1.0 + ap.caso4 * ca.free + ap.mgso4 * mg.free + ap.naso4 * na.free + ap.kso4 * k_free + ap.hso4 * h
        )
        monovalent = (
            hydrogen + oh + hco3 + ca.hco3 + ca.oh + mg.hco3 + mg.oh + na.free + na.co3 + na.so4 + t.potassium
            + t.chloride + t.other_charge + hso4 + ocl
        )  # fmt: skip
        ionic = 0.5 * monovalent + 2.0 * (c + new_s + ca.free + mg.free)
        return new_s, self.xp.most(ionic, 1e-9)

    def _solved(self, species, ap, ionic, step):
        h, c, s, hco3, co2, hydrogen, oh, hso4, ocl, _, ca, mg, na = species
        t = self.t
        carbon, alkalinity = self._balances(species)
        k_free = t.potassium / (1.0 + ap.kso4 * s)
        return Solved(
            h=h, ionic_strength=ionic, carbon=carbon, alkalinity=alkalinity, calcium=ca.total, magnesium=mg.total,
            hydrogen=hydrogen, hydroxide=oh, hco3=hco3, co3=c, co2=co2,
            ca=ca.free, cahco3=ca.hco3, caco3=ca.co3, caso4=ca.so4, caoh=ca.oh,
            mg=mg.free, mghco3=mg.hco3, mgco3=mg.co3, mgso4=mg.so4, mgoh=mg.oh,
            na=na.free, nahco3=na.hco3, naco3=na.co3, naso4=na.so4, k=k_free, kso4=t.potassium - k_free,
            so4=s, hso4=hso4, hypochlorite=ocl,
            ion_product_calcite=ca.free * c / ap.calcite, ion_product_brucite=mg.free / (h * h * ap.brucite),
            gammas=ap.gammas,
        )  # fmt: skip

    def bracketed(self):
        """The slow, sure way for one water: bracket the pH, with the carbonate bracketed inside."""
        if self.fixed_h:
            return self._at_h(self.t.h)[1]
        low, high = math.log(_LOWEST_H), math.log(_HIGHEST_H)
        at_low, at_high = self._at_h(_LOWEST_H)[0], self._at_h(_HIGHEST_H)[0]
        if not (at_low >= 0.0 >= at_high):
            raise errors.ChemistryError("no pH between 3 and 13 agrees with this alkalinity and inorganic carbon")
        found = None
        for _ in range(60):
            middle = 0.5 * (low + high)
            miss, found = self._at_h(math.exp(middle))
            if miss > 0.0:
                low = middle
            else:
                high = middle
        return found

    def _at_h(self, h):
        """At a given h: carbonate from its own balance, then how far the alkalinity is off (falls as h rises)."""
        t = self.t
        s, ionic = t.sulfate, 0.01
        species = ap = None
        on_alkalinity = self.fixed_h and t.carbon is None
        for _ in range(30):
            ap = self.apparent(self.xp, self.k, ionic)
            self._neutral = ap.gammas[4]
            if self.co2_activity is not None and not self.fixed_h:
                c = self.co2_activity / (self._neutral * ap.co2 * h * h)
            else:
                c = self._carbonate_at(ap, h, s, on_alkalinity)
            species = self._species(ap, h, c, s)
            new_s, new_ionic = self._renewed(species, ap, h, s)
            settled = abs(new_ionic - ionic) < 1e-11 and abs(new_s - s) < 1e-13
            s, ionic = new_s, min(new_ionic, 0.6)
            if settled:
                break
        miss = self._misses(species)[1]
        return miss, self._solved(species, ap, ionic, 0.0)

    def _carbonate_at(self, ap, h, s, on_alkalinity):
        def miss(log_c):
            first, second = self._misses(self._species(ap, h, math.exp(log_c), s))
            return second if on_alkalinity else first

        low, high = math.log(1e-30), math.log(1.0)
        if miss(low) > 0.0:
            raise errors.ChemistryError("this pH and alkalinity leave no room for carbonate: the alkalinity is too low")
        for _ in range(80):
            middle = 0.5 * (low + high)
            if miss(middle) > 0.0:
                high = middle
            else:
                low = middle
        return math.exp(0.5 * (low + high))


def _shape(totals, co2_activity):
    parts = [np.shape(getattr(totals, name)) for name in totals.__slots__ if getattr(totals, name) is not None]
    return np.broadcast_shapes(*parts, np.shape(co2_activity) if co2_activity is not None else ())


def _mend(solved, failed, totals, constants, model, calcite, brucite, co2_activity):
    """Solve the waters marked in ``failed`` one by one by bracketing, and put them into ``solved``."""
    shape = failed.shape

    def one(value, index):
        if value is None:
            return None
        return float(np.broadcast_to(value, shape)[index]) if np.ndim(value) else float(value)

    whole = {
        name: np.array(np.broadcast_to(getattr(solved, name), shape), dtype=float)
        for name in Solved.__slots__
        if name != "gammas"
    }
    gammas = [np.array(np.broadcast_to(g, shape), dtype=float) for g in solved.gammas]
    for index in zip(*np.nonzero(failed), strict=True):
        single = type(totals)(**{name: one(getattr(totals, name), index) for name in totals.__slots__})
        at_single = type(constants)(*(one(value, index) for value in constants))
        problem = _Problem(
            _SCALAR, at_single, _APPARENT[model], single, calcite, brucite, one(co2_activity, index)
        )
        mended = problem.bracketed()
        for name, values in whole.items():
            values[index] = getattr(mended, name)
        for values, gamma in zip(gammas, mended.gammas, strict=True):
            values[index] = gamma
    return Solved(gammas=tuple(gammas), **whole)


_LN10_TENTH = activities.LN10 / 10.0
