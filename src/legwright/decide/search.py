"""The best leg of one candidate or alloy family: a Gaussian process asks, the leg answers, a polish ends it.

Every answer is kept in a checkpoint, so that a search that was stopped replays to where it was; the result is
certified against dense maps.
"""

from __future__ import annotations

import hashlib
import json
import math
import warnings
from dataclasses import dataclass
from functools import cache
from itertools import product
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import minimize

from legwright.base.errors import InputError
from legwright.base.files import write_whole
from legwright.base.flags import ordered
from legwright.candidate.family import Family, member
from legwright.candidate.library import Candidate
from legwright.decide.brief import Brief
from legwright.decide.rank import best_design, doping_range, refusal, size_range
from legwright.decide.robust import MadeMap
from legwright.decide.score import properties_over_span, score
from legwright.decide.warnings import point_flags
from legwright.leg.duty import SCORE_NAMES

Array = NDArray[np.float64]

_FIRST_POINTS = 12
#: a gain over the best so far that is worth asking for, as a share of the first score
_LEAST_GAIN = 1e-3
_POLISH_TRIALS = 200
#: compositions of the dense map that certifies a family
_COMPOSITIONS = 13
_NODES, _ROUNDS = 17, 8
#: a variable within this share of its range from an end touches it
_TOUCHING = 1e-3


@dataclass(frozen=True)
class Found:
    """The best design, how it was found and how far the dense map's best lies from it; SI."""

    candidate: Candidate
    shape: str
    size: float
    doping: float
    score: float
    score_name: str
    evaluations: int
    polish_evaluations: int
    before_polish: float
    map_score: float
    touched: tuple[str, ...]
    flags: tuple[str, ...]
    complete: bool

    @property
    def gap(self) -> float:
        """Share by which the dense map's best is better; negative where the search beat the map."""
        return self.map_score / self.score - 1 if self.score > 0 else math.nan


class _Space:
    """A unit cube over composition (families), ln doping and ln size."""

    def __init__(self, subject: Candidate | Family, brief: Brief) -> None:
        self.subject, self.brief, self.duty = subject, brief, brief.task
        self.mixing = len(subject.ends) - 1 if isinstance(subject, Family) else 0
        self.legs = cache(self._legs)
        self.names = (*(subject.ends[1:] if isinstance(subject, Family) else ()), "doping", "size")

    def candidate(self, u: Array) -> Candidate | None:
        """The member at u; None where the shares leave the family."""
        if not isinstance(self.subject, Family):
            return self.subject
        ends = self.subject.data.end
        shares = tuple(round(float(x) * end.most, 4) for x, end in zip(u[: self.mixing], ends[1:], strict=True))
        if not 1 - ends[0].most - 1e-9 <= sum(shares) <= 1 + 1e-9:
            return None
        return member(self.subject, shares)

    def design(self, u: Array) -> tuple[Candidate, float, float] | None:
        """(candidate, doping, size) at u; None where the brief refuses it."""
        one = self.candidate(u)
        if one is None or refusal(self.brief, one, self.duty):
            return None
        dopings = doping_range(self.brief, one)
        if dopings is None:
            return None
        sizes = size_range(self.brief, one)
        doping, size = (
            math.exp(math.log(low) + float(x) * math.log(high / low))
            for x, (low, high) in zip(u[self.mixing :], (dopings, sizes), strict=True)
        )
        return one, doping, size

    def worth(self, u: Array) -> float:
        """Score of the leg at u."""
        design = self.design(np.clip(u, 0.0, 1.0))
        if design is None:
            return 0.0
        one, doping, size = design
        if self.brief.scatter is not None:
            return float(self.legs(one).worth(doping, size))
        return float(score(one, self.duty, doping, size, self.brief.size.shape, _NODES, _ROUNDS))

    def _legs(self, one: Candidate) -> MadeMap:
        """What legs of a candidate are worth as they are made."""
        dopings, scatter = doping_range(self.brief, one), self.brief.scatter
        assert dopings is not None
        assert scatter is not None
        sizes = size_range(self.brief, one)
        return MadeMap.of(one, self.duty, dopings, sizes, self.brief.size.shape, scatter)

    def map_best(self, one: Candidate) -> float:
        """Best score of a dense map of a candidate; 0 where the brief has no use for it."""
        dopings, sizes = doping_range(self.brief, one), size_range(self.brief, one)
        if dopings is None or refusal(self.brief, one, self.duty):
            return 0.0
        if self.brief.scatter is not None:
            return self.legs(one).best(dopings, sizes)[2]
        shape = self.brief.size.shape
        doping, size, _ = best_design(one, self.duty, dopings, sizes, shape)
        return float(score(one, self.duty, doping, size, shape, _NODES, _ROUNDS))


def search(
    subject: Candidate | Family, brief: Brief, evaluations: int = 48, seed: int = 0, resume: Path | None = None
) -> Found:
    """The best leg under the brief's limits, over size, doping and, for a family, composition.

    Expected improvement of a Gaussian process (ask and tell, scikit-optimize) for `evaluations` answers; then the
    simplex of Nelder & Mead from the best. With `resume` each answer is written to that file, and those that stand
    there are not worked out again. An interrupt ends the search with the best so far.
    Raises InputError where a checkpoint belongs to another search, or nothing under the brief can serve.
    """
    from skopt import Optimizer
    from skopt.space import Real

    space = _Space(subject, brief)
    key = _key(subject, brief, seed)
    answers = _read(resume, key) if resume else []
    told: list[tuple[list[float], float]] = []
    complete = True
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # the process tells of repeated points and of its own hyperparameters
        optimizer = Optimizer(
            [Real(0.0, 1.0)] * len(space.names),
            acq_func="EI", acq_func_kwargs={"xi": _LEAST_GAIN}, acq_optimizer="lbfgs",
            n_initial_points=_FIRST_POINTS,
            initial_point_generator="sobol", random_state=seed,
        )  # fmt: skip
        reference = 0.0  # the first score that is not zero: the process works on numbers near 1
        try:
            for place in range(evaluations):
                asked = [float(x) for x in optimizer.ask()]
                kept = answers[place] if place < len(answers) else None
                answer = kept if kept is not None else space.worth(np.array(asked))
                told.append((asked, answer))
                reference = reference or answer
                optimizer.tell(asked, -answer / (reference or 1.0))
                if resume and kept is None:
                    _write(resume, key, [value for _, value in told])
        except KeyboardInterrupt:
            if not any(value > 0 for _, value in told):
                raise  # there is no best so far
            complete = False
    if max(value for _, value in told) <= 0:
        raise InputError(f"no design of '{subject.name}' that was tried can serve this brief")
    best, before = max(told, key=lambda pair: pair[1])
    polish: dict[str, Any] = {"maxfev": _POLISH_TRIALS, "xatol": 1e-5, "fatol": 1e-9 * before}
    polish["initial_simplex"] = _simplex(best)
    sides = [(0.0, 1.0)] * len(best)

    def loss(u: Array) -> float:
        return -space.worth(u)

    polished = minimize(loss, np.array(best), method="Nelder-Mead", bounds=sides, options=polish)  # type: ignore[call-overload]
    u = np.asarray(polished.x) if -polished.fun >= before else np.array(best)
    design = space.design(u)
    assert design is not None
    one, doping, size = design
    reached = space.worth(u)
    made = properties_over_span(one, space.duty.alone, doping, size, brief.size.shape, _NODES)
    touched = tuple(
        name for name, x in zip(space.names, u, strict=True) if not _TOUCHING < float(x) < 1 - _TOUCHING
    )
    return Found(
        one, brief.size.shape, size, doping, reached, SCORE_NAMES[space.duty.maximise], len(told),
        int(polished.nfev), before, _map_best(space), touched,
        ordered(point_flags(one, made, brief.size.shape)), complete,
    )  # fmt: skip


def _simplex(best: list[float], side: float = 0.04) -> Array:
    """A first simplex that stays inside the cube."""
    corner = np.array(best)
    steps = np.diag(np.where(corner < 0.5, side, -side))
    return np.vstack([corner, corner + steps])


def _map_best(space: _Space) -> float:
    """Best score of dense maps over doping and size, for a family at compositions along its line."""
    line = np.linspace(0, 1, _COMPOSITIONS)
    members = (space.candidate(np.array([*shares, 0.5, 0.5])) for shares in product(line, repeat=space.mixing))
    return max((space.map_best(one) for one in members if one is not None), default=0.0)


def _key(subject: Candidate | Family, brief: Brief, seed: int) -> str:
    """What makes two searches the same."""
    whole = f"{subject.name} {subject.path.name} {brief.model_dump_json()} {seed}"
    return hashlib.sha256(whole.encode()).hexdigest()


def _write(path: Path, key: str, answers: list[float]) -> None:
    body: dict[str, Any] = {"search": key, "answers": answers}
    sealed = hashlib.sha256(json.dumps(body).encode()).hexdigest()
    write_whole(path, json.dumps({**body, "sha256": sealed}) + "\n")


def _read(path: Path, key: str) -> list[float]:
    """Answers of an earlier run of the same search; none where the file is not there yet."""
    if not path.exists():
        return []
    try:
        whole = json.loads(path.read_text(encoding="utf-8"))
        body = {"search": whole["search"], "answers": [float(x) for x in whole["answers"]]}
        sealed = whole["sha256"]
    except (OSError, ValueError, KeyError, TypeError) as error:
        raise InputError("is no checkpoint of a search", file=path, slug="other-run") from error
    if hashlib.sha256(json.dumps(body).encode()).hexdigest() != sealed:
        raise InputError("is damaged: its checksum does not fit", file=path, slug="other-run")
    if body["search"] != key:
        raise InputError("belongs to another search (candidate, brief or seed differ)", file=path, slug="other-run")
    answers: list[float] = body["answers"]
    return answers
