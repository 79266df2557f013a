"""How much dopant a crystal holds: nominal atomic per cent, active density, and the limit at a temperature."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.units import K_B
from legwright.candidate.model import Doping

Array = NDArray[np.float64]


def active_density(
    atomic_percent: ArrayLike, volume_per_atom: ArrayLike, carriers_per_dopant: ArrayLike = 1.0
) -> Array:
    """Density of carriers that a nominal composition gives: N = Z (x/100)/V, 1/m³.

    atomic_percent x of all atoms of the crystal (0 … 100), volume_per_atom V (m³), carriers_per_dopant Z (the
    active share times the valence; 1 if all are active); all broadcast. The dopant takes a host's place and its
    room. ValueError for x outside 0 … 100. By definition of atomic per cent.

    >>> f"{float(active_density(1.0, 2.002e-29)):.3e}"  # one per cent in silicon
    '4.995e+26'
    """
    x = np.asarray(atomic_percent, dtype=float)
    if not np.all((x >= 0) & (x <= 100)):
        raise ValueError("atomic per cent must lie within 0 … 100")
    return np.asarray(np.asarray(carriers_per_dopant) * x / 100 / np.asarray(volume_per_atom, dtype=float))


def atomic_percent(
    active_density: ArrayLike, volume_per_atom: ArrayLike, carriers_per_dopant: ArrayLike = 1.0
) -> Array:
    """Nominal dopant for an active density N: x = 100 N V/Z, per cent of all atoms; the inverse of the above.

    active_density N ≥ 0 (1/m³), volume_per_atom V (m³), carriers_per_dopant Z > 0; all broadcast. ValueError
    where N would take more than every atom. By definition of atomic per cent.

    >>> round(float(atomic_percent(5e26, 2e-29)), 12)
    1.0
    """
    x = (
        100
        * np.asarray(active_density, dtype=float)
        * np.asarray(volume_per_atom)
        / np.asarray(carriers_per_dopant)
    )
    if not np.all((x >= 0) & (x <= 100)):
        raise ValueError("atomic per cent must lie within 0 … 100")
    return np.asarray(x)


def solubility(
    highest: ArrayLike, solution_enthalpy: ArrayLike, reference_temperature: ArrayLike, temperature: ArrayLike
) -> Array:
    """Density of dopant in balance with its second phase: N_max(T) = N_ref exp[−(H/k_B)(1/T − 1/T_ref)], 1/m³.

    highest N_ref (1/m³) at reference_temperature T_ref (K), solution_enthalpy H per dopant (J; > 0: more
    dissolves when hot), temperature (K); all broadcast. Dilute solutions, one second phase, no melt: not the
    retrograde side near the melting point, and no more than a few per cent of the sites. Below the temperature
    at which dopants still move (hours: about half the melting point) what was frozen in stays.
    ValueError for a temperature that is not above 0.
    Source: Trumbore, Bell System Technical Journal 39, 205 (1960).

    >>> from scipy import constants as c
    >>> f"{float(solubility(1e26, 0.5 * c.e, 1000.0, [500.0])[0]):.2e}"
    '3.02e+23'
    """
    t, t_ref = np.asarray(temperature, dtype=float), np.asarray(reference_temperature, dtype=float)
    if not (np.all(t > 0) and np.all(t_ref > 0)):
        raise ValueError("a temperature must be above 0 K")
    return np.asarray(np.asarray(highest) * np.exp(-np.asarray(solution_enthalpy) / K_B * (1 / t - 1 / t_ref)))


def active_limit(doping: Doping, temperature: ArrayLike) -> Array:
    """Highest active density at T by a candidate's file, 1/m³: `solubility`, or `highest` at all T without data.

    temperature (K), any shape. ValueError and source as `solubility`.

    >>> from legwright.candidate.library import load_candidate
    >>> data = load_candidate("si-n").data.doping
    >>> bool(active_limit(data, 300.0) == data.highest.si)
    True
    """
    if doping.solution_enthalpy is None or doping.solution_temperature is None:
        return np.full(np.shape(temperature), doping.highest.si)
    return solubility(doping.highest.si, doping.solution_enthalpy.si, doping.solution_temperature.si, temperature)


#: dopants move above this share of the temperature of highest solubility: half the melting point is common practice
_MOVING = 0.5
#: and are all in balance a fifth above that: over it diffusion of 3 to 4 eV grows ten-thousandfold, hours for years
_AWAKE = 0.2


def beyond_solubility(doping: Doping, temperature: ArrayLike, density: ArrayLike) -> NDArray[np.bool_]:
    """Where `density` (1/m³) is more than `active_limit` at a temperature (K) at which dopants move; broadcast.

    False everywhere for a candidate without solubility data. ValueError and source as `solubility`.

    >>> from legwright.candidate.library import load_candidate
    >>> bool(beyond_solubility(load_candidate("si-n").data.doping, 300.0, 1e30))
    False
    """
    t, n = np.broadcast_arrays(np.asarray(temperature, dtype=float), np.asarray(density, dtype=float))
    if doping.solution_temperature is None:
        return np.zeros(t.shape, dtype=bool)
    moving = (t > _mobile_from(doping)) & (t <= doping.solution_temperature.si)
    return np.asarray(moving & (n > active_limit(doping, t) * (1 + 1e-9)))


def lasting_density(doping: Doping, temperature: ArrayLike, density: ArrayLike) -> Array:
    """What is left active of `density` (1/m³) after long service at a temperature (K), 1/m³; they broadcast.

    `active_limit` where that is less, from a fifth above the temperature at which dopants begin to move; the whole
    density below that; between the two a smooth step of its logarithm, since the balance comes ever sooner. All of
    it without solubility data, and above the temperature of highest solubility. How long it takes is not in it.
    ValueError and source as `solubility`.

    >>> from legwright.candidate.library import load_candidate
    >>> doping = load_candidate("sige-n").data.doping
    >>> [f"{n:.1e}" for n in lasting_density(doping, [300.0, 1000.0, 1250.0], 2.5e26)]
    ['2.5e+26', '1.5e+26', '2.5e+26']
    """
    t, n = np.broadcast_arrays(np.asarray(temperature, dtype=float), np.asarray(density, dtype=float))
    if doping.solution_temperature is None:
        return n.copy()
    low = _mobile_from(doping)
    share = np.clip((t - low) / (_AWAKE * low), 0.0, 1.0)
    share = share**2 * (3 - 2 * share)
    limit = np.where(t > doping.solution_temperature.si, n, np.minimum(n, active_limit(doping, t)))
    return np.asarray(n * (limit / n) ** share)


def _mobile_from(doping: Doping) -> float:
    """Temperature above which dopants move in the hours of a service, K."""
    if doping.mobile_temperature is not None:
        return doping.mobile_temperature.si
    assert doping.solution_temperature is not None
    return _MOVING * doping.solution_temperature.si
