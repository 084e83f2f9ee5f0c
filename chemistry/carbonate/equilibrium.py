"""The solver: carbonate equilibrium with ion pairs, for one water or an array of waters.

The unknowns are the activity h of H+ and the concentration c of free CO3, found by Newton's method in their
logarithms with limited steps on the balances of module balances. Free sulfate and ionic strength are renewed
in each step. Waters that have not settled after the allowed steps are solved again by bracketing the pH. The
species are those of phreeqc.dat for these elements (key PHREEQC-DAT), without CaHSO4+ and (CO2)2; the
activity of water is 1.
"""

import math
from types import SimpleNamespace

import numpy as np

from chemistry import activity as activities
from chemistry import errors
from chemistry.carbonate import apparent, balances, bracketing, constants_of_equilibrium
from chemistry.constants import Values

# Size of the last step, relative; what is left after it is about a tenth.
_TOLERANCE = 1e-7
_TIGHT = 1e-10  # where a search runs on top
_MOST_STEPS = 40
_TINY = 1e-300
_PAIRED = 60.0  # a first guess at how sulfate binds calcium and magnesium, L/mol

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
    largest=lambda values: np.max(values, initial=0.0),
    where=np.where,
)

Solved = balances.Solved


def solve(
    totals: Values,
    model: str,
    *,
    calcite: bool = False,
    brucite: bool = False,
    co2_activity: Values = None,
    start: Values = None,
    tight: bool = False,
) -> balances.Solved:
    """Speciate ``totals`` (see waters.Totals); returns balances.Solved.

    Which two of h, alkalinity and carbon stand in ``totals`` decides what is found. With ``calcite`` or
    ``brucite`` the water is brought to equilibrium with that solid (dissolving or forming it): calcium,
    magnesium, carbon and alkalinity in the result are what stays dissolved. ``co2_activity`` (mol/kg) takes
    the place of carbon for a water in equilibrium with a gas. ``start`` is an earlier Solved to begin from; ``tight``
    asks for a relative 1e-10 instead of 1e-7. Raises ChemistryError where no answer exists between
    pH 3 and 13, OutOfRange where the ionic strength passes 0.5 mol/L.
    """
    activities.require_model(model)
    tolerance = _TIGHT if tight else _TOLERANCE
    fields = [getattr(totals, name) for name in totals.__slots__]
    fields.append(co2_activity)
    scalar = not any(isinstance(value, np.ndarray) for value in fields)
    xp = _SCALAR if scalar else _ARRAY
    constants = constants_of_equilibrium.at(totals.temperature_c)
    problem = Problem(xp, constants, apparent.OF_MODEL[model], totals, calcite, brucite, co2_activity)
    if scalar:
        try:
            solved, step = problem.newton(start, tolerance)
            settled = step < tolerance
        except (ZeroDivisionError, OverflowError, ValueError):
            settled = False
        if not settled:
            solved = bracketing.bracketed(problem)
    else:
        with np.errstate(all="ignore"):
            solved, step = problem.newton(start, tolerance)
        if not np.max(step, initial=0.0) < tolerance:
            shape = np.broadcast_shapes(*(np.shape(value) for value in fields if value is not None))
            failed = np.broadcast_to(~(np.asarray(step) < tolerance), shape)
            solved = bracketing.mend(solved, failed, problem, _SCALAR)
    errors.require("ionic strength", solved.ionic_strength, "mol/L", 0.0, 0.5, "Davies 1962")
    if not problem.fixed_h:
        bracketing.require_ph(solved.h)
    return solved


def log10(value: Values) -> Values:
    """Log10 of a number or an array; minus infinity at zero (a metal that is absent)."""
    if type(value) is float:
        return math.log10(value) if value > 0.0 else -math.inf
    with np.errstate(divide="ignore"):
        return np.log10(value)


class Problem:
    """One call of :func:`solve`: constants, totals and what is held fixed."""

    def __init__(
        self,
        xp: Values,
        constants: Values,
        apparent_of: Values,
        totals: Values,
        calcite: bool,
        brucite: bool,
        co2_activity: Values,
    ) -> None:
        self.xp = xp
        self.k = constants
        self.apparent = apparent_of
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

    def evaluate(self, ap: Values, h: Values, c: Values, s: Values) -> balances.State:
        """balances.State of this problem."""
        return balances.evaluate(ap, self.t, h, c, s, self.calcite, self.brucite, not self.fixed_h)

    def newton(self, start: Values, tolerance: float = _TOLERANCE) -> tuple[balances.Solved, Values]:
        """Return (Solved, size of the last step)."""
        xp, t = self.xp, self.t
        ap, h, c, s, ionic = self._start(start)
        for _ in range(_MOST_STEPS):
            state = self.evaluate(ap, h, c, s)
            new_s, new_ionic = balances.renewed(ap, t, state)
            if self.fixed_h:
                dv = xp.most(-0.9, xp.least(9.0, self._one_step(state)))
                c = c * (1.0 + dv)
                step = abs(dv)
                new_ionic = new_ionic + state.ionic_v * xp.least(dv, 1.0)
            else:
                du, dv = self._two_steps(ap, state)
                step = abs(du) + abs(dv)
                limit = xp.least(1.0, 2.0 / xp.most(step, 1e-12))
                du, dv = du * limit, dv * limit
                h = xp.least(1e-1, xp.most(1e-15, h * xp.exp(du)))
                c = xp.most(_TINY, c * xp.exp(dv))
                new_ionic = new_ionic + state.ionic_u * du + state.ionic_v * dv
            new_ionic = xp.most(new_ionic, 0.3 * ionic)
            step = step + abs(new_ionic - ionic) / new_ionic + abs(new_s - s) / (t.sulfate + 1e-9)
            if xp.largest(step) < tolerance:
                break
            s, ionic = new_s, new_ionic
            ap = self.apparent(xp, self.k, ionic)
        return balances.solved(ap, t, state, ionic, self.calcite, self.brucite, self.k.henry_co2), step

    def _start(self, start: Values) -> Values:
        """First apparent constants, h, c, free sulfate and ionic strength."""
        xp, t = self.xp, self.t
        if start is not None:
            ap = self.apparent(xp, self.k, start.ionic_strength)
            c = start.co3
            if self.calcite:
                c = c / xp.sqrt(xp.most(1e-4, xp.least(start.ion_product_calcite, 1e4)))
            return ap, (t.h if self.fixed_h else start.h), c, start.so4, start.ionic_strength
        weak = t.carbon if t.alkalinity is None else abs(t.alkalinity)
        s = t.sulfate / (1.0 + _PAIRED * (t.calcium + t.magnesium))
        ionic = 2.0 * (t.calcium + t.magnesium - t.sulfate + s + s) + 0.5 * (
            t.sodium + t.potassium + t.chloride + t.other_charge + weak
        )
        ionic = xp.least(0.6, xp.most(ionic, 1e-6))
        ap = self.apparent(xp, self.k, ionic)
        if self.fixed_h:
            h = t.h
        elif self.co2_activity is not None:
            h = self.k.k1 * self.co2_activity / xp.most(t.alkalinity, 1e-6)
            h = xp.least(1e-4, xp.most(1e-11, h))
        else:
            # The quadratic of carbonate alkalinity alone; past its end the excess is hydroxide.
            a, carbon = t.alkalinity, t.carbon
            k1, k2 = ap.hco3 / ap.co2, 1.0 / ap.hco3
            some = xp.most(a, 1e-8)
            lack = k1 * (a - carbon)
            inside = lack * lack - 4.0 * some * k1 * k2 * (a - 2.0 * carbon)
            h = (xp.sqrt(xp.most(inside, 0.0)) - lack) / (2.0 * some)
            h = xp.where(a > 1.95 * carbon, ap.oh / xp.most(a - 1.9 * carbon, 1e-6), h)
            h = xp.least(10**-3.5, xp.most(10**-12.5, h))
        if self.co2_activity is not None:
            c = self.co2_activity / (ap.gammas[4] * ap.co2 * h * h)
        elif t.carbon is not None:
            held = (ap.cahco3 * h + ap.caco3) * t.calcium + (ap.mghco3 * h + ap.mgco3) * t.magnesium
            c = t.carbon / (1.0 + (ap.hco3 + ap.co2 * h) * h + held)
        else:
            held = (ap.cahco3 * h + 2.0 * ap.caco3) * t.calcium + (ap.mghco3 * h + 2.0 * ap.mgco3) * t.magnesium
            c = xp.most(t.alkalinity + ap.h * h - ap.oh / h, 1e-12) / (2.0 + ap.hco3 * h + held)
        return ap, h, xp.most(c, 1e-20), s, ionic

    def _one_step(self, state: Values) -> Values:
        if self.carbon_target is not None:
            return (self.carbon_target - state.carbon) / state.carbon_v
        return (self.alkalinity_target - state.alkalinity) / state.alkalinity_v

    def _two_steps(self, ap: Values, state: Values) -> Values:
        if self.co2_activity is not None:
            first = state.co2 - self.co2_activity / ap.gammas[4]
            first_u, first_v = state.co2 + state.co2, state.co2
        else:
            first = state.carbon - self.carbon_target
            first_u, first_v = state.carbon_u, state.carbon_v
        second = state.alkalinity - self.alkalinity_target
        second_u, second_v = state.alkalinity_u, state.alkalinity_v
        determinant = first_u * second_v - first_v * second_u
        du = (first_v * second - second_v * first) / determinant
        dv = (second_u * first - first_u * second) / determinant
        return du, dv
