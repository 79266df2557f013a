"""Which process limits a design point, and how far its carriers and phonons travel."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from legwright.physics.carriers import bulk_flow, fill, held_back
from legwright.physics.crystal import Crystal, majority_carriers
from legwright.physics.lattice import crystal_rates, grain_path, mode_heat, modes, wall_suppression

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Limits:
    """Shares of each process in a resistance, adding up to 1, and what flows by free path inside a grain.

    shares by name; paths (m) ascend; carried: share of the flow in unbounded material on paths up to each, 0 … 1.
    """

    shares: dict[str, float]
    paths: Array
    carried: Array

    def carried_within(self, path: Array) -> Array:
        """Share of the flow in unbounded material whose free path is at most `path` (m)."""
        index = np.searchsorted(self.paths, path, side="right")
        return np.concatenate([[0.0], self.carried])[index]


def electrical_limits(one: Crystal, temperature: float, doping: float, size: float, shape: str) -> Limits:
    """What slows the carriers at one design point: temperature (K), doping (1/m³), size (m) and shape, one of each.

    Share of process i: mean of (1/τ_i)/(1/τ) over energies and bands, weighted with what each conducts; the
    boundary's 1/τ is what takes the conductivity of an energy from unbounded to bounded. Shares add up to 1.
    A barrier at the boundary, which stands in series with the grain, is not among them. ArithmeticError as `fill`.
    Source: Matthiessen's rule for each energy, as Ziman, Electrons and Phonons (1960).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> one = crystal(load_candidate("si-n"))
    >>> found = electrical_limits(one, 300.0, 1e26, 1e-8, "grain")
    >>> round(sum(found.shares.values()), 9), found.shares["grain boundaries"] > 0.01
    (1.0, True)
    """
    electrons, t, n = one.electrons, np.array(temperature), np.array(doping)
    flow = bulk_flow(electrons, t, n, fill(electrons, t, n))
    acting = one.acting_size(np.array(size), shape)
    kept = held_back(flow.mean_free_path, acting, shape, electrons.reflection)
    conducted = flow.spectral * kept
    rates = {name: np.broadcast_to(rate, conducted.shape) for name, rate in flow.rates.items()}
    rates[_boundary(shape)] = sum(rates.values()) * (1 / kept - 1)
    return _limits(rates, conducted, flow.mean_free_path, flow.spectral)


def thermal_limits(one: Crystal, temperature: float, doping: float, size: float, shape: str) -> Limits:
    """What slows the phonons at one design point, as `electrical_limits`: processes that resist, by modes.

    Arguments, one of each, as `electrical_limits`. Normal processes do not resist; they only share out heat, and
    are left out. ArithmeticError as `fill`.
    Source: Matthiessen's rule for each mode, as Ziman, Electrons and Phonons (1960).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> one = crystal(load_candidate("si-n"))
    >>> found = thermal_limits(one, 300.0, 1e26, 1e-8, "grain")
    >>> max(found.shares, key=found.shares.get)
    'grain boundaries'
    """
    phonons, t, n = one.phonons, np.array(temperature), np.array(doping)
    mesh = modes(phonons)
    among = majority_carriers(one.electrons, t, fill(one.electrons, t, n).eta)
    inside = crystal_rates(phonons, mesh, t, n, among)
    lifetime = 1 / (inside.resistive + inside.normal)
    path = mesh.velocity * lifetime
    if shape == "grain":
        boundary = mesh.velocity / grain_path(phonons, mesh, one.acting_size(np.array(size), shape))
    else:
        kept = wall_suppression(phonons, mesh, shape)(path / size)
        boundary = (1 / kept - 1) / lifetime
    rates = {
        "Umklapp": inside.umklapp,
        "point defects": np.broadcast_to(inside.defects, path.shape),
        "carriers": np.broadcast_to(inside.carriers, path.shape),
        _boundary(shape): boundary,
    }
    for name, rate in (("dislocations", inside.dislocations), ("precipitates", inside.precipitates)):
        if rate is not None:
            rates[name] = rate
    heat = mesh.weight * mode_heat(mesh.omega, t) * mesh.velocity**2
    return _limits(rates, heat / (1 / lifetime + boundary), path, heat * lifetime)


def _boundary(shape: str) -> str:
    return {"grain": "grain boundaries", "wire": "wire wall", "film": "film faces"}[shape]


def _limits(rates: dict[str, Array], flowing: Array, path: Array, unbounded: Array) -> Limits:
    total, whole = sum(rates.values()), np.sum(flowing)
    shares = {name: float(np.sum(flowing * rate / total) / whole) for name, rate in rates.items()}
    order = np.argsort(path, axis=None)
    carried = np.cumsum(unbounded.ravel()[order])
    return Limits(shares, path.ravel()[order], carried / carried[-1])
