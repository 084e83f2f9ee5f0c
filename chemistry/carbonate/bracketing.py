"""The slow, sure way to an equilibrium: bracket the pH, with the carbonate bracketed inside, one water at a
time."""

import math

import numpy as np

from chemistry import errors
from chemistry.carbonate import balances
from chemistry.constants import Values

LOWEST_PH, HIGHEST_PH = 3.0, 13.0
_SOURCE = "limit of this model"


def require_ph(h: Values) -> None:
    """Raise OutOfRange where the activity ``h`` of H+ is outside pH 3 to 13."""
    if type(h) is float:
        if 0.999e-13 <= h <= 1.001e-3:
            return
    elif h.size == 0 or (h.min() >= 0.999e-13 and h.max() <= 1.001e-3):
        return
    with np.errstate(all="ignore"):
        ph = -np.log10(np.asarray(h))
    errors.require("pH", float(ph) if ph.ndim == 0 else ph, "", LOWEST_PH, HIGHEST_PH, _SOURCE)


def bracketed(problem: Values) -> balances.Solved:
    """balances.Solved of one water (an equilibrium.Problem of numbers); ChemistryError where there is no
    answer."""
    if problem.fixed_h:
        return _at_h(problem, problem.t.h)[1]
    low, high = -HIGHEST_PH * _LN10, -LOWEST_PH * _LN10
    at_low, at_high = _at_h(problem, math.exp(low))[0], _at_h(problem, math.exp(high))[0]
    if not (at_low >= 0.0 >= at_high):
        raise errors.ChemistryError("no pH between 3 and 13 agrees with this alkalinity and inorganic carbon")
    found = _at_h(problem, math.exp(low))[1]
    for _ in range(60):
        middle = 0.5 * (low + high)
        miss, found = _at_h(problem, math.exp(middle))
        if miss > 0.0:
            low = middle
        else:
            high = middle
    return found


def _at_h(problem: Values, h: Values) -> tuple[float, balances.Solved]:
    """At a given h: carbonate from its own balance, then how far the alkalinity is off (it falls as h
    rises)."""
    t = problem.t
    s, ionic = t.sulfate, 0.01
    state: Values = None
    ap: Values = None
    for _ in range(30):
        ap = problem.apparent(problem.xp, problem.k, ionic)
        if problem.co2_activity is not None and not problem.fixed_h:
            c = problem.co2_activity / (ap.gammas[4] * ap.co2 * h * h)
        else:
            c = _carbonate_at(problem, ap, h, s)
        state = problem.evaluate(ap, h, c, s)
        new_s, new_ionic = balances.renewed(ap, t, state)
        settled = abs(new_ionic - ionic) < 1e-11 and abs(new_s - s) < 1e-13
        s, ionic = new_s, min(new_ionic, 0.6)
        if settled:
            break
    miss = 0.0 if problem.alkalinity_target is None else state.alkalinity - problem.alkalinity_target
    return miss, balances.solved(ap, t, state, ionic, problem.calcite, problem.brucite, problem.k.henry_co2)


def _carbonate_at(problem: Values, ap: Values, h: Values, s: Values) -> float:
    on_carbon = problem.carbon_target is not None
    target = problem.carbon_target if on_carbon else problem.alkalinity_target

    def too_much(log_c: Values) -> bool:
        state = problem.evaluate(ap, h, math.exp(log_c), s)
        return bool((state.carbon if on_carbon else state.alkalinity) > target)

    low, high = math.log(1e-30), 0.0
    if too_much(low):
        raise errors.ChemistryError("this pH leaves no room for carbonate: the alkalinity is too low for it")
    for _ in range(80):
        middle = 0.5 * (low + high)
        if too_much(middle):
            high = middle
        else:
            low = middle
    return math.exp(0.5 * (low + high))


def mend(solved: Values, failed: Values, problem: Values, scalar_functions: Values) -> balances.Solved:
    """Solve the waters marked in ``failed`` one by one by bracketing, and put them into ``solved``."""
    shape = failed.shape

    def one(value: Values, index: Values) -> Values:
        if value is None:
            return None
        return float(np.broadcast_to(value, shape)[index]) if np.ndim(value) else float(value)

    whole = {
        name: np.array(np.broadcast_to(getattr(solved, name), shape), dtype=float)
        for name in balances.Solved.__slots__
        if name != "gammas"
    }
    gammas = [np.array(np.broadcast_to(gamma, shape), dtype=float) for gamma in solved.gammas]
    totals, constants = problem.t, problem.k
    for index in zip(*np.nonzero(failed), strict=True):
        single = type(problem)(
            scalar_functions,
            type(constants)(*(one(value, index) for value in constants)),
            problem.apparent,
            type(totals)(**{name: one(getattr(totals, name), index) for name in totals.__slots__}),
            problem.calcite,
            problem.brucite,
            one(problem.co2_activity, index),
        )
        mended = bracketed(single)
        for name, values in whole.items():
            values[index] = getattr(mended, name)
        for values, gamma in zip(gammas, mended.gammas, strict=True):
            values[index] = gamma
    return balances.Solved(gammas=tuple(gammas), **whole)


_LN10 = math.log(10.0)
