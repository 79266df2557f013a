"""How sure a ranking is over joint draws of what is not known: intervals, wins, ties, whether a small size pays."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from legwright.base.flags import ordered
from legwright.decide.brief import Brief
from legwright.decide.drawn import Drawn, drawn
from legwright.decide.draws import rounded
from legwright.decide.rank import Row

Array = NDArray[np.float64]

#: two candidates are tied unless one is twice as likely to be the better: each beats the other in a third of draws
TIED = 1 / 3
#: a small size pays in a draw where it beats coarse material by this factor: less is not worth the milling
PAYS = 1.02
#: a share of wins above this reads as certain
_CERTAIN = 0.95
_FIRST = 3


@dataclass(frozen=True)
class Confidence:
    """One row over the draws, each at its own best size and doping.

    low, high and size_low, size_high: 5 and 95 % points of score and of best size (m); shares of the draws that it
    wins, in which it is among the first three, and in which nanostructuring pays; names that it is tied with.
    """

    low: float
    high: float
    win_share: float
    first_three_share: float
    size_low: float
    size_high: float
    nanostructuring_pays: float
    tied_with: tuple[str, ...]


def draw_all(brief: Brief, rows: list[Row], draws: int, seed: int, workers: int = 1) -> dict[str, Drawn]:
    """By candidate name, for the rows that can serve: all draws (rounded up to a power of two, 16 at the least).

    `workers` processes share the candidates; each candidate is one whole task, so the figures do not change.
    """
    able = [row for row in rows if row.score > 0]
    count = rounded(draws)
    if workers == 1:
        made = [drawn(brief, row, count, seed) for row in able]
    else:
        from joblib import Parallel, delayed

        made = Parallel(n_jobs=workers)(delayed(drawn)(brief, row, count, seed) for row in able)
    return {row.candidate.name: one for row, one in zip(able, made, strict=True)}


def confidences(found: dict[str, Drawn]) -> dict[str, Confidence]:
    """How sure each candidate's place is. A draw in which nobody can serve has no winner."""
    if not found:
        return {}
    names = sorted(found)
    scores = np.stack([found[name].score for name in names])
    serving = scores > 0
    places = np.argsort(np.argsort(-scores, axis=0, kind="stable"), axis=0, kind="stable")
    beats = np.mean(scores[:, None] > scores, axis=2)
    sure = {}
    for i, name in enumerate(names):
        one = found[name]
        low, high = np.quantile(one.score, (0.05, 0.95))
        size_low, size_high = np.quantile(one.size, (0.05, 0.95))
        tied = tuple(other for j, other in enumerate(names) if j != i and min(beats[i, j], beats[j, i]) >= TIED)
        sure[name] = Confidence(
            float(low),
            float(high),
            float(np.mean(serving[i] & (places[i] == 0))),
            float(np.mean(serving[i] & (places[i] < _FIRST))),
            float(size_low),
            float(size_high),
            float(np.mean(one.score > PAYS * one.coarse)),
            tied,
        )
    return sure


def with_cautions(rows: list[Row], sure: dict[str, Confidence]) -> list[Row]:
    """The rows, with a flag where a win looks certain and rests on numbers mostly from memory."""

    def caution(row: Row) -> Row:
        known = sure.get(row.candidate.name)
        if known is None or known.win_share <= _CERTAIN or "from-memory" not in row.flags:
            return row
        return replace(row, flags=ordered([*row.flags, "sure-from-memory"]))

    return [caution(row) for row in rows]
