"""What limits a candidate at a design point or over a duty, and whether making it small pays."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from legwright.base.errors import InputError
from legwright.base.flags import ordered
from legwright.base.units import NM
from legwright.candidate.library import Candidate
from legwright.decide.brief import Brief
from legwright.decide.rank import design_or_best
from legwright.decide.warnings import point_flags
from legwright.physics.crystal import crystal
from legwright.physics.properties import Properties, evaluate, evaluate_crystal
from legwright.physics.shares import Limits, electrical_limits, thermal_limits

Array = NDArray[np.float64]

#: carriers "pay" for a small size once their mobility has fallen to this share of the coarse material's
PAYING = 0.95
#: a gain in zT smaller than this is within what the model can tell
TELLING = 0.03
_DUTY_POINTS = 7
_PATHS = np.geomspace(0.1 * NM, 1e5 * NM, 61)
_SIZES = np.geomspace(1 * NM, 1e5 * NM, 401)


@dataclass(frozen=True)
class Why:
    """Shares of resistance (each adds up to 1), flow by free path, and the verdict on size; SI.

    `zt`, `zt_coarse`: mean over the temperatures; `zt_grain_law`: with s = 0 and s = 1 (None but for grains);
    `electrons_pay_below`: None where carriers do not pay down to 1 nm.
    """

    candidate: Candidate
    temperatures: tuple[float, ...]
    doping: float
    size: float
    shape: str
    electrical_shares: dict[str, float]
    thermal_shares: dict[str, float]
    paths: Array
    electrons_within: Array
    phonons_within: Array
    electrons_pay_below: float | None
    zt: float
    zt_coarse: float
    zt_grain_law: tuple[float, float] | None
    conductivity_kept: float
    lattice_kept: float
    flags: tuple[str, ...]

    @property
    def verdict(self) -> str:
        """Whether the size pays, in one sentence with its numbers."""
        gain = self.zt / self.zt_coarse - 1
        pays = (
            "pays" if gain > TELLING else "does not pay" if gain < -TELLING else "makes no difference that counts"
        )
        where = f"{self.temperatures[0]:.0f} K"
        if len(self.temperatures) > 1:
            where = f"{self.temperatures[0]:.0f} to {self.temperatures[-1]:.0f} K"
        ends = ""
        if self.zt_grain_law is not None:
            low, high = sorted(self.zt_grain_law)
            ends = f"; between the ends of the grain law zT is {low:.2g} to {high:.2g}"
        return (
            f"Making {self.candidate.name} with a {self.shape} size of {self.size / NM:.3g} nm {pays}: "
            f"at {where} and this doping zT is {self.zt:.2g} against {self.zt_coarse:.2g} coarse "
            f"({100 * gain:+.0f} %), since lattice conductivity falls to {100 * self.lattice_kept:.0f} % "
            f"and electrical conductivity to {100 * self.conductivity_kept:.0f} %{ends}."
        )


def design_of(
    candidate: Candidate,
    brief: Brief | None,
    temperature: float | None,
    doping: float | None,
    size: float | None,
    shape: str | None,
) -> tuple[Array, float, float, str]:
    """Temperatures, doping, size and shape to look at: as given, else those of the brief's best design (SI).

    Raises InputError where neither says what the doping or the size is.
    """
    if brief is None:
        if doping is None or size is None:
            raise InputError("needs --doping and --size, or a brief that finds them")
        assert temperature is not None
        return np.array([temperature]), doping, size, shape or "grain"
    doping, size = design_or_best(candidate, brief, doping, size)
    kelvin = np.linspace(brief.duty.cold_K, brief.duty.hot_K, _DUTY_POINTS)
    return kelvin, doping, size, shape or brief.size.shape


def why(candidate: Candidate, temperatures: Array, doping: float, size: float, shape: str) -> Why:
    """Shares, free paths and verdict, averaged over the temperatures (K) where there are several."""
    one = crystal(candidate)
    both = evaluate(candidate, temperatures[:, None], doping, [size, np.inf], shape)
    electrical, thermal = (
        [limits(one, float(t), doping, size, shape) for t in temperatures]
        for limits in (electrical_limits, thermal_limits)
    )
    kept = np.mean(both.electrical_conductivity[:, 0] / both.electrical_conductivity[:, 1])
    lattice = np.mean(both.lattice_thermal_conductivity[:, 0] / both.lattice_thermal_conductivity[:, 1])
    zt, coarse = np.mean(both.zt, axis=0)
    here = evaluate(candidate, temperatures, doping, size, shape)
    return Why(
        candidate,
        tuple(float(t) for t in temperatures),
        doping,
        size,
        shape,
        _mean_shares(electrical),
        _mean_shares(thermal),
        _PATHS,
        np.mean([limit.carried_within(_PATHS) for limit in electrical], axis=0),
        np.mean([limit.carried_within(_PATHS) for limit in thermal], axis=0),
        _electrons_pay_below(candidate, temperatures, doping, shape),
        float(zt),
        float(coarse),
        _grain_law_ends(candidate, here) if shape == "grain" else None,
        float(kept),
        float(lattice),
        ordered(point_flags(candidate, here, shape)),
    )


def _mean_shares(limits: list[Limits]) -> dict[str, float]:
    return {name: float(np.mean([limit.shares[name] for limit in limits])) for name in limits[0].shares}


def _electrons_pay_below(candidate: Candidate, temperatures: Array, doping: float, shape: str) -> float | None:
    sizes = np.append(_SIZES, np.inf)
    mobility = np.mean(evaluate(candidate, temperatures[:, None], doping, sizes, shape).mobility, axis=0)
    kept = mobility[:-1] / mobility[-1]
    if kept[0] >= PAYING:
        return None
    return float(np.exp(np.interp(PAYING, kept, np.log(_SIZES))))


def _grain_law_ends(candidate: Candidate, here: Properties) -> tuple[float, float]:
    one = crystal(candidate)
    ends = (
        evaluate_crystal(
            replace(one, phonons=replace(one.phonons, grain_exponent=exponent)),
            here.temperature,
            here.doping,
            here.size,
        )
        for exponent in (0.0, 1.0)
    )
    grey, by_wavelength = (float(np.mean(end.zt)) for end in ends)
    return grey, by_wavelength
