"""Published legs, couples and modules against the library: what was measured over what their materials could do."""

from __future__ import annotations

from dataclasses import dataclass

from legwright.candidate.devices import Device, load_devices
from legwright.candidate.library import load_candidate
from legwright.candidate.model import numbers
from legwright.decide.brief import Brief, DutyTable, LegTable, SizeTable
from legwright.decide.couple import Design, best_doping, designed, join
from legwright.leg.duty import Goal

#: a largest difference is asked of a cooler whose own difference is as little as this, K
_LITTLE = 10.0


@dataclass(frozen=True)
class DeviceVerdict:
    """One published figure of a device and the best that its materials could do; SI.

    `computed`: best doping at the stated size, best areas, interfaces and current, with nothing lost outside the
    legs. `fixed`: the device's paper also stands behind a number of one of its candidates.
    """

    device: Device
    computed: float
    fixed: bool

    @property
    def ratio(self) -> float:
        """Measured over computed: what contacts, straps, heat past the legs and unlike materials left."""
        return self.device.measured / self.computed


def audit_devices(devices: tuple[Device, ...] | None = None) -> list[DeviceVerdict]:
    """Each device of the table; by default the shipped one."""
    return [_judge(one) for one in (load_devices() if devices is None else devices)]


def _judge(one: Device) -> DeviceVerdict:
    brief = _brief(one)
    sides = ((names, size) for names, size in ((one.n, one.n_size), (one.p, one.p_size)) if names)
    found = join(brief, [_design(brief, names, size) for names, size in sides])
    running = found.running
    if one.quantity == "delta_t":
        computed = found.largest_difference or 0.0
    elif running is None:
        computed = 0.0
    else:
        computed = float(running.efficiency if one.quantity == "efficiency" else running.power)
    sources = {number.source for name in (*one.n, *one.p) for _, number in numbers(load_candidate(name).data)}
    return DeviceVerdict(one, computed, one.source in sources)


def _design(brief: Brief, names: tuple[str, ...], size: float) -> Design:
    candidates = [load_candidate(name) for name in names]
    if len(candidates) > 1:
        return designed(brief, candidates, size=size)
    return ((candidates[0], best_doping(brief, candidates[0], size), size),)


def _brief(one: Device) -> Brief:
    goal: Goal = one.quantity
    duty = DutyTable.model_construct(
        kind="cooler" if one.quantity == "delta_t" else "generator",
        hot_K=one.hot,
        cold_K=one.hot - _LITTLE if one.cold is None else one.cold,
        maximise=goal,
    )
    leg = LegTable() if one.length is None else LegTable(length_mm=1e3 * one.length)
    size = SizeTable(shape="grain", min_nm=10.0, max_nm=1e5)
    return Brief(title=one.device, duty=duty, size=size, leg=leg)
