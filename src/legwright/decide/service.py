"""What hours of service leave of a leg, process by process; what the candidate's file does not say is unknown."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy import constants

from legwright.candidate.library import Candidate
from legwright.candidate.model import Loss
from legwright.candidate.supply import mass_density
from legwright.decide.brief import Brief
from legwright.decide.installed import Delivered, served
from legwright.decide.rank import WINDOW_SHARE, size_range, window_of
from legwright.decide.score import leg_material, nodes_between
from legwright.leg.ageing import (
    Growth,
    grown_size,
    growth_of,
    most_sublimed,
    temperature_along,
    time_factor,
    time_to_thin,
)
from legwright.leg.balance import LegMaterial
from legwright.leg.duty import SCORE_NAMES, score_of
from legwright.leg.installed import Running, best_running
from legwright.physics.properties import COLDEST, Properties, evaluate
from legwright.physics.solubility import lasting_density

Array = NDArray[np.float64]
Status = Literal["known", "at least", "not expected", "unknown"]

#: a leg is worn when it keeps no more than this share: a tenth lost is the usual end of life of generators
WORN = 0.9
#: hours looked at; what lasts longer is told as at least the last
_LONGEST, _TIMES = 1e7, 71
_NODES, _SIZES, _PLACES, _SHOWN = 65, 65, 201, 11


@dataclass(frozen=True)
class Wear:
    """One process: hours until a tenth is lost, with the factor (1 standard deviation) by which they may be wrong.

    `known`: the hours as computed. `at least`: a bound. `not expected`: it does not come to a tenth. `unknown`: no
    data. `reason` says why, whatever the status.
    """

    process: str
    status: Status
    reason: str
    hours: float | None = None
    factor: float | None = None


@dataclass(frozen=True)
class Service:
    """A leg after its hours; SI but for the hours. None: unknown, or the leg cannot serve.

    The score at the end counts what `counted` names. `position`, `temperature`, `size`: along the leg at its end,
    hot end first. `best_start`: the size to begin with for the best end; `start_window`: the sizes to begin with
    that keep, at the end, the window's share of the best fresh score.
    """

    hours: float
    width: float
    score_name: str
    score_start: float
    score_end: float | None
    counted: tuple[str, ...]
    position: Array
    temperature: Array
    size: Array | None
    best_start: float | None
    start_window: tuple[float, float] | None
    wear: tuple[Wear, ...]


def service(design: Delivered, brief: Brief) -> Service | None:
    """How the leg ages in the brief's hours; None where the brief gives none, or the leg does not run.

    Every place is held at the temperature that it has in the aged leg, so that its size is a function of
    temperature alone and no round of profiles is needed; the load follows the best current all the time.
    """
    if brief.leg.hours is None or design.running is None or design.doping is None or design.size is None:
        return None
    leg = _Ageing(design.candidate, brief, design.running, design.doping, design.size)
    hours = brief.leg.hours
    start, counted = float(leg.scores(design.size)), tuple(leg.counted())
    end = float(leg.scores(design.size, hours, lasting=True)) if counted else None
    position, temperature = leg.along(hours)
    best, window = leg.best_start(hours) if leg.growth else (None, None)
    wear = [leg.growing(start), *leg.subliming(temperature, position), leg.losing_dopant(start), leg.oxidising()]
    shown = np.linspace(0, _PLACES - 1, _SHOWN).astype(int)
    return Service(
        hours,
        leg.width,
        SCORE_NAMES[leg.duty.maximise],
        start,
        end,
        counted,
        position[shown],
        temperature[shown],
        leg.sizes_at(temperature[shown], hours),
        best,
        window,
        tuple(wear),
    )


class _Ageing:
    """One leg of one design, and what its hours do to it."""

    def __init__(self, candidate: Candidate, brief: Brief, running: Running, doping: float, size: float) -> None:
        self.candidate, self.brief, self.running = candidate, brief, running
        self.doping, self.size, self.shape = doping, size, brief.size.shape
        self.duty = replace(brief.task, length=float(running.length), lengths=None)
        low, high = self.duty.reach
        self.nodes = nodes_between(max(low, COLDEST), high, _NODES)
        self.hottest = float(running.hot_end)
        width = brief.leg.width_mm
        self.width = self.duty.length if width is None else 1e-3 * width
        seen = candidate.data.coarsening
        grows = seen is not None and self.shape == "grain" and math.isfinite(size)
        self.growth: Growth | None = growth_of(seen) if seen is not None and grows else None

    def made(self, sizes: ArrayLike, hours: ArrayLike = 0.0, lasting: bool = False) -> Properties:
        """Properties at the nodes of legs that began with these sizes (m), after these hours; they broadcast."""
        t = self.nodes.reshape(-1, *(1,) * max(np.ndim(sizes), np.ndim(hours)))
        size = sizes if self.growth is None else self.grown(sizes, t, hours)
        doping = lasting_density(self.candidate.data.doping, t, self.doping) if lasting else self.doping
        return evaluate(self.candidate, t, doping, size, self.shape, self.duty.felt_length)

    def material(self, sizes: ArrayLike, hours: ArrayLike = 0.0, lasting: bool = False) -> LegMaterial:
        """The same as a leg's material, whose size and doping go with temperature."""
        return leg_material(self.candidate, self.made(sizes, hours, lasting))

    def scores(self, sizes: ArrayLike, hours: ArrayLike = 0.0, lasting: bool = False) -> Array:
        """The brief's score of each such leg, by the way that follows the steep properties of an aged leg."""
        return score_of(best_running(self.material(sizes, hours, lasting), self.duty), self.duty)

    def grown(self, size: ArrayLike, temperature: ArrayLike, hours: ArrayLike) -> Array:
        assert self.growth is not None
        return grown_size(size, temperature, np.asarray(hours) * constants.hour, self.growth)

    def sizes_at(self, temperature: Array, hours: float) -> Array | None:
        """Sizes at places of these temperatures after the hours; None where growth is not known."""
        if math.isinf(self.size):
            return np.full(temperature.shape, np.inf)
        return None if self.growth is None else self.grown(self.size, temperature, hours)

    def counted(self) -> Iterator[str]:
        """What the score at the end counts."""
        if self.growth is not None or math.isinf(self.size):
            yield "grain growth"
        if self.candidate.data.doping.solution_temperature is not None:
            yield "dopant loss"

    def along(self, hours: float) -> tuple[Array, Array]:
        """Positions and temperatures of the aged leg at its best; of the fresh one where it serves no more."""
        material, job = self.material(self.size, hours, lasting=True), served(self.duty)
        running = best_running(material, job)
        if running.serves:
            return temperature_along(material, job, running, _PLACES)
        return temperature_along(self.material(self.size), job, self.running, _PLACES)

    def growing(self, start: float) -> Wear:
        """Hours until grain growth has taken a tenth of the score."""
        process, seen = "grain growth", self.candidate.data.coarsening
        if math.isinf(self.size):
            return Wear(process, "not expected", "the leg is coarse from the start")
        if self.shape != "grain":
            return Wear(process, "unknown", f"a {self.shape} breaks up or roughens by other laws than grains grow")
        if self.growth is None or seen is None:
            reason = "the file names no annealing with exponent, activation energy and sizes, which belong together"
            return Wear(process, "unknown", reason)
        times = np.geomspace(1.0, _LONGEST, _TIMES)
        kept = self.scores(self.size, times) / start
        worn = np.flatnonzero(kept <= WORN)
        if not worn.size:
            if float(self.scores(np.inf)) > WORN * start:
                return Wear(process, "not expected", "coarse material keeps more than 90 % of the score")
            return Wear(process, "at least", "looked no further", _LONGEST)
        factor = float(time_factor(seen, self.hottest))
        reason = "at the temperatures of the leg's own profile"
        if worn[0] == 0:
            return Wear(process, "known", "within the first hour", 1.0, factor)
        last, first = worn[0] - 1, worn[0]
        way = (kept[last] - WORN) / (kept[last] - kept[first])
        return Wear(process, "known", reason, float(times[last] * (times[first] / times[last]) ** way), factor)

    def subliming(self, temperature: Array, position: Array) -> Iterator[Wear]:
        """Hours until the sides have receded by so much that a tenth of power or lift is gone, bare and coated."""
        points = self.candidate.data.service.sublimation
        if not points:
            yield Wear("sublimation", "unknown", "the file has no measured rate")
        for coat in sorted({one.coat or "" for one in points}):
            named = [one for one in points if (one.coat or "") == coat]
            process = f"sublimation, under {coat}" if coat else "sublimation, bare"
            yield self._subliming(process, sorted(named, key=lambda one: one.temperature.si), temperature, position)

    def _subliming(self, process: str, points: list[Loss], temperature: Array, position: Array) -> Wear:
        measured = [one.temperature.si for one in points]
        rate = most_sublimed(measured, [one.rate.si for one in points], temperature)
        if np.any(np.isnan(rate)):
            reason = f"measured up to {measured[-1]:g} K only, and the leg has {np.max(temperature):.0f} K"
            return Wear(process, "unknown", reason)
        seconds = time_to_thin(rate / mass_density(self.candidate), position, self.width, WORN)
        factor = math.exp(max(one.rate.relative_spread for one in points))
        hours = seconds / constants.hour
        if np.min(temperature) >= measured[0]:
            return Wear(process, "known", "rates between measured ones", hours, factor)
        reason = f"below {measured[0]:g} K not measured: that rate is taken there, and the true one is smaller"
        return Wear(process, "at least", reason, hours, factor)

    def losing_dopant(self, start: float) -> Wear:
        """Whether a tenth of the score goes once the dopant is in balance with its second phase."""
        process = "dopant loss"
        if self.candidate.data.doping.solution_temperature is None:
            return Wear(process, "unknown", "the file has no solubility at a temperature")
        share = float(self.scores(self.size, lasting=True)) / start
        told = f"in balance with its second phase the leg keeps {100 * share:.0f} % of its score"
        if share > WORN:
            return Wear(process, "not expected", told)
        return Wear(process, "unknown", f"{told}; how soon is not known")

    def oxidising(self) -> Wear:
        """Whether the hot end oxidises in air."""
        onset = self.candidate.data.service.oxidation_onset
        if onset is None:
            return Wear("oxidation", "unknown", "the file says nothing of it")
        if self.hottest < onset.si:
            return Wear("oxidation", "not expected", f"in air it begins at {onset.si:g} K")
        return Wear("oxidation", "unknown", f"begins at {onset.si:g} K in air, at a rate not known: keep air out")

    def best_start(self, hours: float) -> tuple[float | None, tuple[float, float] | None]:
        """The starting size with the best score at the end, and those that end well; as `Service` has them."""
        sizes = np.geomspace(*size_range(self.brief, self.candidate), _SIZES)
        fresh, aged = self.scores(sizes), self.scores(sizes, hours, lasting=True)
        if not np.max(aged) > 0:
            return None, None
        best = float(sizes[int(np.argmax(aged))])
        level = WINDOW_SHARE * float(np.max(fresh))
        return best, None if np.max(aged) < level else window_of(sizes, aged, level)[:2]
