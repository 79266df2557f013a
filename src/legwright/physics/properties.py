"""A candidate at (temperature, doping, size): every property that a leg needs."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cached_property, partial
from typing import TYPE_CHECKING, Literal, get_args

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.errors import InputError, nearest
from legwright.base.units import CM2, MICRO, NM, PER_CM3
from legwright.candidate.library import Candidate
from legwright.physics import moments
from legwright.physics.carriers import (
    Electrons,
    Filling,
    Flow,
    Integrals,
    bulk_flow,
    fill,
    hall_at,
    hall_spectrum,
    integrals_at,
    past_barriers,
    path_spectrum,
)
from legwright.physics.crystal import Crystal, crystal, majority_carriers
from legwright.physics.hall import hall_coefficient, hall_factor
from legwright.physics.lattice import (
    amorphous_minimum,
    bounded,
    conductivity_by_size,
    crystal_rates,
    modes,
    optical_conductivity,
    short_leg_conductivity,
)

if TYPE_CHECKING:
    import pandas as pd

Array = NDArray[np.float64]
Shape = Literal["grain", "wire", "film"]
SHAPES: tuple[Shape, ...] = get_args(Shape)

#: what can be asked, SI: beyond these the formulas still run but mean nothing
COLDEST, HOTTEST = 2.0, 3000.0
THINNEST, DENSEST = 1e12, 1e29
SMALLEST, LARGEST = 1e-10, 1.0

#: states (T, doping) and design points of one block: memory grows with the block, not with the map; rough walls
#: act on each mode by itself
_STATES, _POINTS, _POINTS_BY_MODE = 256, 400_000, 4_000


@dataclass(frozen=True)
class Properties:
    """SI arrays of one shape, to which temperature (K), doping (1/m³) and size (m) broadcast; shape of the body.

    electrical_conductivity σ (S/m), seebeck S (V/K), mobility of the majority carriers (m²/(V s));
    electronic_thermal_conductivity κ_e with its bipolar part, bipolar_thermal_conductivity by itself,
    lattice_thermal_conductivity κ_L and its amorphous_minimum (W/(m K)); crystal: the numbers they were made from.
    """

    temperature: Array
    doping: Array
    size: Array
    shape: Shape
    electrical_conductivity: Array
    seebeck: Array
    electronic_thermal_conductivity: Array
    bipolar_thermal_conductivity: Array
    lattice_thermal_conductivity: Array
    amorphous_minimum: Array
    mobility: Array
    crystal: Crystal = field(repr=False, compare=False)

    @property
    def thermal_conductivity(self) -> Array:
        """Electronic (with its bipolar part) and lattice together, W/(m K)."""
        return self.electronic_thermal_conductivity + self.lattice_thermal_conductivity

    @property
    def lorenz_number(self) -> Array:
        """κ_e/(σT), W Ω/K²: from the integrals, never assumed."""
        return self.electronic_thermal_conductivity / (self.electrical_conductivity * self.temperature)

    @property
    def power_factor(self) -> Array:
        """S²σ, W/(m K²)."""
        return self.seebeck**2 * self.electrical_conductivity

    @property
    def zt(self) -> Array:
        """Figure of merit S²σT/κ (Ioffe 1957)."""
        return self.power_factor * self.temperature / self.thermal_conductivity

    @property
    def hall_coefficient(self) -> Array:
        """Hall coefficient in a weak field, m³/C: negative for electrons, zero where both kinds deflect alike."""
        return self._hall["hall_coefficient"]

    @property
    def hall_factor(self) -> Array:
        """Hall mobility over drift mobility of the majority carriers alone, dimensionless."""
        return self._hall["hall_factor"]

    @property
    def hall_mobility(self) -> Array:
        """|R_H| σ, m²/(V s), as a Hall bar gives it."""
        return np.abs(self.hall_coefficient) * self.electrical_conductivity

    @cached_property
    def _hall(self) -> dict[str, Array]:
        """Worked out when first asked for: maps and ranks do without."""
        t, n, d = (_one_of_equals(a) for a in (self.temperature, self.doping, self.size))
        acting = self.crystal.acting_size(d, self.shape)
        parts = _evaluate_blocks(self.crystal, t, n, acting, self.shape, _hall_block, _POINTS)
        return {name: np.broadcast_to(part, self.size.shape) for name, part in parts.items()}

    def columns(self) -> dict[str, Array]:
        """Everything by name and trade unit; one value a design point."""
        named = {
            "temperature [K]": self.temperature,
            "doping [1/cm^3]": self.doping / PER_CM3,
            "size [nm]": self.size / NM,
            "electrical conductivity [S/m]": self.electrical_conductivity,
            "seebeck [uV/K]": self.seebeck / MICRO,
            "mobility [cm^2/V/s]": self.mobility / CM2,
            "hall coefficient [cm^3/C]": self.hall_coefficient * PER_CM3,
            "hall mobility [cm^2/V/s]": self.hall_mobility / CM2,
            "electronic thermal conductivity [W/m/K]": self.electronic_thermal_conductivity,
            "bipolar thermal conductivity [W/m/K]": self.bipolar_thermal_conductivity,
            "lattice thermal conductivity [W/m/K]": self.lattice_thermal_conductivity,
            "thermal conductivity [W/m/K]": self.thermal_conductivity,
            "amorphous minimum [W/m/K]": self.amorphous_minimum,
            "lorenz number [W ohm/K^2]": self.lorenz_number,
            "power factor [W/m/K^2]": self.power_factor,
            "zT [1]": self.zt,
        }
        return {name: np.ravel(values) for name, values in named.items()}

    def to_frame(self) -> pd.DataFrame:
        """One row a design point, in trade units that each column names."""
        import pandas as pd

        return pd.DataFrame(self.columns())

    def _repr_html_(self) -> str:
        """For notebooks: the frame, cut where it is long."""
        return str(self.to_frame().to_html(max_rows=40, index=False))


def evaluate(
    candidate: Candidate,
    temperature: ArrayLike,
    doping: ArrayLike,
    size: ArrayLike,
    shape: str = "grain",
    length: float = np.inf,
) -> Properties:
    """All transport properties of a candidate, in SI.

    temperature T (2 to 3000 K), doping: net active density (1/m³; its sign is the candidate's carrier),
    size d (m; inf for coarse material) of grain, wire or film by `shape`; all broadcast.
    `length` of the leg between its contacts (m, one for all; inf: long): σ and κ are its conductances times that,
    each energy and mode by itself from diffusive to ballistic (`short_leg_suppression`); contacts absorb all that
    comes, the leg is taken as of one temperature, and optical heat, which hardly travels, stays as it was.
    σ = e²L_0, S = −L_1/(eTL_0), κ_e = (L_2 − L_1²/L_0)/T over all bands on one energy axis (Ravich et al.);
    bipolar = κ_e − κ_e(conduction alone) − κ_e(valence alone) (Goldsmid); lattice after Callaway.
    Raises InputError naming a value that physics does not allow.
    Sources: Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides (Plenum, 1970); Goldsmid, Introduction to
    Thermoelectricity (Springer, 2010); Callaway, Physical Review 113, 1046 (1959).

    >>> from legwright.candidate.library import load_candidate
    >>> made = evaluate(load_candidate("si-n"), 300.0, 1e26, [20e-9, float("inf")])
    >>> bool(made.lattice_thermal_conductivity[0] < 0.2 * made.lattice_thermal_conductivity[1])
    True
    """
    return evaluate_crystal(crystal(candidate), temperature, doping, size, shape, length)


def evaluate_crystal(
    one: Crystal,
    temperature: ArrayLike,
    doping: ArrayLike,
    size: ArrayLike,
    shape: str = "grain",
    length: float = np.inf,
) -> Properties:
    """`evaluate` for a crystal in hand, whose numbers may have been changed.

    Arguments, units, shapes, sources and InputError as `evaluate`.

    >>> from dataclasses import replace
    >>> from legwright.candidate.library import load_candidate
    >>> one = crystal(load_candidate("si-n"))
    >>> pure = replace(one, phonons=replace(one.phonons, carrier_weight=0.0))
    >>> args = (300.0, 1e26, np.inf)
    >>> here, there = (evaluate_crystal(each, *args).lattice_thermal_conductivity for each in (pure, one))
    >>> bool(here > there)
    True
    """
    if shape not in SHAPES:
        raise InputError(
            f"value '{shape}' is not allowed; {nearest(shape, SHAPES)}", key="shape", slug="out-of-range"
        )
    t = within(temperature, "temperature", COLDEST, HOTTEST, "K")
    n = within(doping, "doping", THINNEST, DENSEST, "1/m³")
    d = within(size, "size", SMALLEST, LARGEST, "m", infinite=True)
    rank = max(t.ndim, n.ndim, d.ndim)
    t, n, d = (np.reshape(a, (1,) * (rank - a.ndim) + a.shape) for a in (t, n, d))
    if not length > 0:
        raise InputError(f"value {length:g} m is not allowed; a length above 0", key="length", slug="out-of-range")
    block = partial(_evaluate_block, length=length)
    by_mode = one.phonons.wall_roughness is not None or np.isfinite(length)
    parts = _evaluate_blocks(
        one, t, n, one.acting_size(d, shape), shape, block, _POINTS_BY_MODE if by_mode else _POINTS
    )
    whole = np.broadcast_shapes(t.shape, n.shape, d.shape)
    t, n, d = (np.broadcast_to(a, whole) for a in (t, n, d))
    return Properties(t, n, d, shape, **parts, crystal=one)


def within(value: ArrayLike, key: str, low: float, high: float, unit: str, *, infinite: bool = False) -> Array:
    """`value` (of any shape, in SI) as an array, where all of it lies from `low` to `high` or, if so said, is inf.

    Raises InputError that names `key`, the first value outside and what is allowed. By definition.

    >>> float(within(300.0, "temperature", 2.0, 3000.0, "K"))
    300.0
    """
    array = np.asarray(value, dtype=float)
    allowed = ((array >= low) & (array <= high)) | (infinite & np.isposinf(array))
    if not np.all(allowed):
        bad = array[~allowed].flat[0]
        or_bulk = ", or infinite" if infinite else ""
        raise InputError(
            f"value {bad:g} {unit} is not allowed; {low:g} to {high:g} {unit}{or_bulk}",
            key=key,
            slug="out-of-range",
        )
    return array


def _one_of_equals(array: Array) -> Array:
    """Each broadcast axis, along which an array only repeats itself, back to length 1."""
    return array[tuple(slice(None) if step else slice(1) for step in array.strides)]


_Block = Callable[[Crystal, Array, Array, Array, str], dict[str, Array]]


def _evaluate_blocks(
    one: Crystal, t: Array, n: Array, d: Array, shape: str, block: _Block, points: int
) -> dict[str, Array]:
    """Split the longest axis until a block is small; each point's sums do not depend on the split."""
    states = np.broadcast_shapes(t.shape, n.shape)
    whole = np.broadcast_shapes(states, d.shape)
    if int(np.prod(states)) > _STATES:
        axis = int(np.argmax(states))
    elif int(np.prod(whole)) > points:
        axis = int(np.argmax(whole))
    else:
        return block(one, t, n, d, shape)
    middle = whole[axis] // 2

    def half(a: Array, part: slice) -> Array:
        index = [slice(None)] * a.ndim
        index[axis] = part if a.shape[axis] > 1 else slice(None)
        return a[tuple(index)]

    halves = [
        _evaluate_blocks(one, half(t, part), half(n, part), half(d, part), shape, block, points)
        for part in (slice(None, middle), slice(middle, None))
    ]
    return {name: np.concatenate([half[name] for half in halves], axis=axis) for name in halves[0]}


def _evaluate_block(
    one: Crystal, t: Array, n: Array, d: Array, shape: str, length: float = np.inf
) -> dict[str, Array]:
    electrons, phonons, dense = one.electrons, one.phonons, one.dense_share
    filled_t, filled_n = np.broadcast_arrays(t, n)
    filling = fill(electrons, filled_t, filled_n)
    flow = bulk_flow(electrons, filled_t, filled_n, filling)
    up, down, _ = _both_kinds(electrons, filled_t, filling, flow, d, shape, length)
    bipolar = moments.bipolar_heat(up.l0, up.l1, down.l0, down.l1, t)
    one_sided = [moments.electronic_heat(part.l0, part.l1, part.l2, t) for part in (up, down)]
    mesh = modes(phonons)
    rates = crystal_rates(phonons, mesh, t, n, majority_carriers(electrons, filled_t, filling.eta))
    if np.isfinite(length):
        acoustic = short_leg_conductivity(mesh, bounded(phonons, mesh, rates, d, shape), filled_t, np.array(length))
    else:
        acoustic = conductivity_by_size(phonons, mesh, rates, filled_t, d, shape)
    moving = up if electrons.carrier > 0 else down
    parts = {
        "electrical_conductivity": dense * moments.conductivity(up.l0 + down.l0),
        "seebeck": moments.seebeck(up.l0 + down.l0, up.l1 + down.l1, t),
        "electronic_thermal_conductivity": dense * (one_sided[0] + one_sided[1] + bipolar),
        "bipolar_thermal_conductivity": dense * bipolar,
        "lattice_thermal_conductivity": dense * (acoustic + optical_conductivity(phonons, t)),
        "amorphous_minimum": dense * amorphous_minimum(phonons, t),
        "mobility": dense * moments.mobility(moving.l0, np.sum(filling.density[..., electrons.majority], axis=-1)),
    }
    whole = np.broadcast_shapes(t.shape, n.shape, d.shape)
    return {name: np.broadcast_to(part, whole) for name, part in parts.items()}


def _both_kinds(
    electrons: Electrons, t: Array, filling: Filling, flow: Flow, d: Array, shape: str, length: float = np.inf
) -> tuple[Integrals, Integrals, tuple[Array | float, Array | float]]:
    """Integrals of the conduction and of the valence bands, and the share that barriers left of each."""
    up, down = integrals_at(path_spectrum(electrons, flow), d, shape, electrons.reflection, length)
    if not electrons.barrier or shape != "grain":
        return up, down, (1.0, 1.0)
    if electrons.carrier > 0:
        share = past_barriers(electrons, t, filling, up.l0, d)
        return up.times(share), down, (share, 1.0)
    share = past_barriers(electrons, t, filling, down.l0, d)
    return up, down.times(share), (1.0, share)


def _hall_block(one: Crystal, t: Array, n: Array, d: Array, shape: str) -> dict[str, Array]:
    electrons = one.electrons
    filled_t, filled_n = np.broadcast_arrays(t, n)
    filling = fill(electrons, filled_t, filled_n)
    flow = bulk_flow(electrons, filled_t, filled_n, filling)
    up, down, left = _both_kinds(electrons, filled_t, filling, flow, d, shape)
    turned = hall_at(hall_spectrum(electrons, filled_t, flow), d, shape, electrons.reflection)
    turned_up, turned_down = (part * share**2 for part, share in zip(turned, left, strict=True))
    moving, its_turned = (up, turned_up) if electrons.carrier > 0 else (down, turned_down)
    density = np.sum(filling.density[..., electrons.majority], axis=-1)
    parts = {
        "hall_coefficient": hall_coefficient(up.l0, turned_up, down.l0, turned_down),
        "hall_factor": hall_factor(moving.l0, its_turned, density),
    }
    whole = np.broadcast_shapes(t.shape, n.shape, d.shape)
    return {name: np.broadcast_to(part, whole) for name, part in parts.items()}
