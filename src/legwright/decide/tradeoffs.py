"""What a better score costs in other coin: the candidates that nobody else beats on both counts."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.candidate.supply import cost_per_kg, hazardous_elements, supply_concentration
from legwright.decide.rank import Row

Array = NDArray[np.float64]


def not_dominated(good: ArrayLike) -> NDArray[np.bool_]:
    """Rows of (candidates, counts) than which no other is at least as good on every count and better on one.

    More is better on each count; NaN (not known) is never on the front and beats nobody.

    >>> not_dominated([[3.0, 1.0], [2.0, 2.0], [1.0, 1.5], [3.0, 1.0]]).tolist()
    [True, True, False, True]
    """
    rows = np.asarray(good, dtype=float)
    no_worse = np.all(rows[:, None] >= rows, axis=2)
    better = np.any(rows[:, None] > rows, axis=2)
    return np.asarray(~np.any(no_worse & better, axis=0) & ~np.any(np.isnan(rows), axis=1))


def _less_concentrated(row: Row) -> float:
    found = supply_concentration(row.candidate)
    return np.nan if found is None else -found


#: what is weighed against the score, counted so that more is better; a size that may be larger is easier to make
AXES: Mapping[str, Callable[[Row], float]] = {
    "cost_USD_per_kg": lambda row: -cost_per_kg(row.candidate),
    "supply_concentration": _less_concentrated,
    "hazardous_elements": lambda row: -len(hazardous_elements(row.candidate)),
    "largest_size_nm": lambda row: row.window[1] if row.window else np.nan,
}


def trade_offs(rows: list[Row]) -> dict[str, tuple[str, ...]]:
    """By axis, the names on the front of score against it, best score first; only rows that can serve.

    The largest size is the upper end of a row's window: it keeps 95 % of the score and is the easiest to make.
    """
    able = [row for row in rows if row.score > 0]
    found = {}
    for axis, count in AXES.items():
        good = np.array([(row.score, count(row)) for row in able]).reshape(-1, 2)
        found[axis] = tuple(row.candidate.name for row, kept in zip(able, not_dominated(good), strict=True) if kept)
    return found
