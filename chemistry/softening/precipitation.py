"""Which of calcite and brucite form from a water, and what stays dissolved; for one water and for arrays."""

from dataclasses import fields

import numpy as np

from chemistry.carbonate import equilibrium, waters
from chemistry.constants import Values

_NOTICEABLE = 1e-9  # of ion product over solubility product, and mol/L: below this nothing forms


def precipitate(dosed: waters.Totals, activity: str) -> equilibrium.Solved:
    """equilibrium.Solved of ``dosed`` totals (alkalinity and carbon given) after calcite and brucite have
    formed."""
    closed = equilibrium.solve(dosed, activity)
    if type(closed.ion_product_calcite) is float:
        return _precipitate_one(dosed, closed, activity)
    return _precipitate_many(dosed, closed, activity)


def _precipitate_one(dosed: waters.Totals, closed: equilibrium.Solved, activity: str) -> equilibrium.Solved:
    calcite = closed.ion_product_calcite > 1.0 + _NOTICEABLE
    brucite = closed.ion_product_brucite > 1.0 + _NOTICEABLE
    found: equilibrium.Solved = closed
    for _ in range(6):
        if not (calcite or brucite):
            return closed
        found = equilibrium.solve(dosed, activity, calcite=calcite, brucite=brucite, start=found)
        if calcite and brucite and found.calcium > dosed.calcium + _NOTICEABLE:
            calcite = False
        elif brucite and found.magnesium > dosed.magnesium + _NOTICEABLE:
            brucite = False
        elif not brucite and found.ion_product_brucite > 1.0 + _NOTICEABLE:
            brucite = True
        elif not calcite and found.ion_product_calcite > 1.0 + _NOTICEABLE:
            calcite = True
        else:
            break
    return found


def _precipitate_many(dosed: waters.Totals, closed: equilibrium.Solved, activity: str) -> equilibrium.Solved:
    shape = np.broadcast_shapes(shape_of(dosed), np.shape(closed.h))
    flat = {name: _flat(getattr(dosed, name), shape) for name in dosed.__slots__}
    result = {name: _flat(getattr(closed, name), shape).copy() for name in _SOLVED_FIELDS}
    gammas = [_flat(gamma, shape).copy() for gamma in closed.gammas]
    calcite = result["ion_product_calcite"] > 1.0 + _NOTICEABLE
    brucite = result["ion_product_brucite"] > 1.0 + _NOTICEABLE
    open_cases = calcite | brucite
    for _ in range(6):
        if not open_cases.any():
            break
        changed = np.zeros_like(open_cases)
        for with_calcite, with_brucite in ((True, False), (True, True), (False, True)):
            where = np.nonzero(open_cases & (calcite == with_calcite) & (brucite == with_brucite))[0]
            if where.size == 0:
                continue
            part = waters.Totals(**{n: None if v is None else v[where] for n, v in flat.items()})
            begin = equilibrium.Solved(gammas=tuple(g[where] for g in gammas), **{n: v[where] for n, v in result.items()})
            found = equilibrium.solve(part, activity, calcite=with_calcite, brucite=with_brucite, start=begin)
            for name, values in result.items():
                values[where] = getattr(found, name)
            for values, gamma in zip(gammas, found.gammas, strict=True):
                values[where] = gamma
            if with_calcite and with_brucite:
                drop = found.calcium > part.calcium + _NOTICEABLE
                calcite[where[drop]] = False
            else:
                drop = np.zeros(where.size, dtype=bool)
            drop_brucite = ~drop & with_brucite & (found.magnesium > part.magnesium + _NOTICEABLE)
            brucite[where[drop_brucite]] = False
            add_brucite = ~drop & (not with_brucite) & (found.ion_product_brucite > 1.0 + _NOTICEABLE)
            brucite[where[add_brucite]] = True
            add_calcite = ~drop & ~drop_brucite & (not with_calcite)
            add_calcite = add_calcite & (found.ion_product_calcite > 1.0 + _NOTICEABLE)
            calcite[where[add_calcite]] = True
            changed[where] = drop | drop_brucite | add_brucite | add_calcite
        # A case that lost both solids is the closed water again.
        bare = changed & ~calcite & ~brucite
        for name, values in result.items():
            values[bare] = _flat(getattr(closed, name), shape)[bare]
        open_cases = changed & (calcite | brucite)
    shaped = {name: values.reshape(shape) for name, values in result.items()}
    return equilibrium.Solved(gammas=tuple(g.reshape(shape) for g in gammas), **shaped)


_SOLVED_FIELDS = tuple(field.name for field in fields(equilibrium.Solved) if field.name != "gammas")


def shape_of(totals: waters.Totals) -> tuple[int, ...]:
    """The shape the totals broadcast to."""
    parts = [np.shape(getattr(totals, n)) for n in totals.__slots__ if getattr(totals, n) is not None]
    return np.broadcast_shapes(*parts)


def _flat(value: Values, shape: tuple[int, ...]) -> Values:
    return None if value is None else np.broadcast_to(value, shape).reshape(-1)
