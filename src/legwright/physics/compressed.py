"""Whole maps from a few points: properties as Chebyshev series in ln(doping) and ln(size), built once and checked.

At one temperature every property is smooth in ln(doping) and ln(size): boundaries act through Λ/d, whose nearest
singularities lie at ln d = ln Λ ± iπ, and the Fermi function's are as far away. So some hundred points of the
direct path hold the whole map, and evaluating it is two matrix products: dopings × coefficients × sizes. Where
doping has a corner (a knot of the heavy-doping factor) the series is cut in two. Coarse material is no end of
ln(size): it comes along as one more column, a series in ln(doping) alone.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from numpy.polynomial.chebyshev import chebpts1, chebpts2, chebvander
from numpy.typing import ArrayLike, NDArray
from scipy.fft import dct

from legwright.base.errors import InputError
from legwright.candidate.library import Candidate
from legwright.physics.crystal import Crystal, crystal
from legwright.physics.lattice import amorphous_minimum
from legwright.physics.properties import DENSEST, LARGEST, SMALLEST, THINNEST, Properties, evaluate_crystal, within

Array = NDArray[np.float64]

#: what has a series, zT's four first: logarithms of what is positive, S, and the share of κ_e that pairs carry
_QUANTITIES, _FOR_ZT = 6, 4
_SIGMA, _ELECTRONIC, _LATTICE, _SEEBECK, _MOBILITY, _PAIRS = range(_QUANTITIES)
_AS_THEY_ARE = (_SEEBECK, _PAIRS)

#: V/K: S may pass zero, so its error is told in shares of |S| or of this, about copper's, whichever is larger
_LEAST_SEEBECK = 1e-6
#: tolerances that can be asked: the direct path itself has steps of 1e-9, where paths move from piece to piece
FINEST, COARSEST = 1e-7, 1e-2

#: terms in ln doping on a piece, one more than a power of two, and in ln size
_FEWEST_DOPINGS, _MOST_DOPINGS = 9, 33
_MOST_SIZES = 300
#: last terms whose sum is below this share of the tolerance are left out
_SPARED = 0.1
#: the slowest fall of terms that is taken for one
_SLOWEST = 0.99
#: how often a piece of doping may be halved before the tolerance is refused
_HALVINGS = 4

#: products of matrices have this shape alone, so that a point's bits do not depend on the map around it
_TILE_DOPINGS, _TILE_SIZES = 8, 128
#: tiles worked on at a time: they stay in the cache
_DOWN, _ACROSS = 4, 8


@dataclass(frozen=True)
class CompressedMap:
    """Properties of one crystal in one shape over dopings and sizes, as Chebyshev series; SI.

    crystal and shape as in `Properties`; temperature (K), of any shape; edges of the pieces of doping (1/m³),
    ascending; sizes: smallest and largest finite size (m); tolerance asked for and error estimated, relative.
    coefficients: (temperatures, quantities, terms in ln doping piece by piece, terms in ln size and then coarse
    material); amorphous_minimum (W/(m K)) hangs on temperature alone.
    """

    crystal: Crystal = field(repr=False, compare=False)
    shape: str
    temperature: Array
    edges: Array
    sizes: tuple[float, float]
    tolerance: float
    error: float
    coefficients: Array = field(repr=False, compare=False)
    amorphous_minimum: Array = field(repr=False, compare=False)

    @property
    def terms(self) -> tuple[int, int]:
        """How many in ln doping, over all pieces, and in ln size."""
        return self.coefficients.shape[2], self.coefficients.shape[3] - 1

    def evaluate(self, doping: ArrayLike, size: ArrayLike) -> Properties:
        """All properties at each doping (1/m³) with each size (m, may be inf): axes of temperature, doping, size.

        An outer product: the arguments do not broadcast, and one without axes adds none. Where the series' error
        makes the pairs' share of κ_e negative, it is 0. InputError outside the map.
        """
        n, d = self._allowed(doping, size)

        def finish(place: int, parts: Array, into: list[Array]) -> None:
            for quantity, (part, target) in enumerate(zip(parts, into, strict=True)):
                np.copyto(target, part) if quantity in _AS_THEY_ARE else np.exp(part, out=target)
            np.multiply(np.maximum(parts[_PAIRS], 0.0), into[_ELECTRONIC], out=into[_PAIRS])

        made = self._fill(n, d, finish, series=_QUANTITIES, results=_QUANTITIES)
        sigma, electronic, lattice, seebeck, mobility, bipolar = made
        whole = sigma.shape
        outer = (1,) * (n.ndim + d.ndim)
        temperature, least = (
            np.broadcast_to(np.reshape(a, self.temperature.shape + outer), whole)
            for a in (self.temperature, self.amorphous_minimum)
        )
        return Properties(
            temperature,
            np.broadcast_to(n.reshape(n.shape + (1,) * d.ndim), whole),
            np.broadcast_to(d, whole),
            self.shape,  # type: ignore[arg-type]
            electrical_conductivity=sigma,
            seebeck=seebeck,
            electronic_thermal_conductivity=electronic,
            bipolar_thermal_conductivity=bipolar,
            lattice_thermal_conductivity=lattice,
            amorphous_minimum=least,
            mobility=mobility,
            crystal=self.crystal,
        )

    def zt(self, doping: ArrayLike, size: ArrayLike) -> Array:
        """zT alone, as `evaluate` gives it, quicker."""
        n, d = self._allowed(doping, size)
        kelvin = self.temperature.ravel()

        def finish(place: int, parts: Array, into: list[Array]) -> None:
            sigma, electronic, lattice, seebeck = parts
            for part in (sigma, electronic, lattice):
                np.exp(part, out=part)
            # the order of operations of `Properties.zt`: the same bits
            np.multiply(seebeck, seebeck, out=seebeck)
            np.multiply(seebeck, sigma, out=seebeck)
            np.multiply(seebeck, kelvin[place], out=seebeck)
            np.divide(seebeck, np.add(electronic, lattice, out=electronic), out=into[0])

        return self._fill(n, d, finish, series=_FOR_ZT, results=1)[0]

    def _allowed(self, doping: ArrayLike, size: ArrayLike) -> tuple[Array, Array]:
        n = within(doping, "doping", float(self.edges[0]), float(self.edges[-1]), "1/m³")
        return n, within(size, "size", *self.sizes, "m", infinite=True)

    def _fill(
        self,
        doping: Array,
        size: Array,
        finish: Callable[[int, Array, list[Array]], None],
        series: int,
        results: int,
    ) -> list[Array]:
        """Results over the whole outer product: dopings × coefficients × sizes by tiles, `finish`ed in place."""
        by_doping = _tiles(self._in_doping(doping.ravel()), _TILE_DOPINGS)
        by_size = np.ascontiguousarray(
            np.swapaxes(_tiles(_in_size(size.ravel(), self.sizes, self.terms[1]), _TILE_SIZES), 1, 2)
        )
        down, across = by_doping.shape[0], by_size.shape[0]
        kelvins = self.coefficients.shape[0]
        wholes = [np.empty((kelvins, down, _TILE_DOPINGS, across, _TILE_SIZES)) for _ in range(results)]
        for place, i in np.ndindex(kelvins, -(-down // _DOWN)):
            rows = slice(i * _DOWN, (i + 1) * _DOWN)
            half = by_doping[rows] @ self.coefficients[place, :series, None]
            for j in range(0, across, _ACROSS):
                columns = slice(j, j + _ACROSS)
                parts = np.swapaxes(half[:, :, None] @ by_size[columns], 2, 3)
                finish(place, parts, [whole[place, rows, :, columns] for whole in wholes])
        shape = self.temperature.shape + doping.shape + size.shape
        flat = (whole.reshape(kelvins, down * _TILE_DOPINGS, -1) for whole in wholes)
        return [each[:, : doping.size, : size.size].reshape(shape) for each in flat]

    def _in_doping(self, doping: Array) -> Array:
        """Chebyshev polynomials of each doping on its own piece, zeros on the others: (dopings, terms)."""
        pieces = self.edges.size - 1
        own = np.clip(np.searchsorted(self.edges, doping, side="right") - 1, 0, pieces - 1)
        local = _local(doping, self.edges[own], self.edges[own + 1])
        each = chebvander(local, self.terms[0] // pieces - 1)
        basis = np.zeros((doping.size, pieces, each.shape[1]))
        basis[np.arange(doping.size), own] = each
        return basis.reshape(doping.size, -1)


def _local(x: Array, low: Array | float, high: Array | float) -> Array:
    """Place of ln x between ln low and ln high, −1 … 1."""
    return np.asarray(np.clip(2 * np.log(x / low) / np.log(high / low) - 1, -1.0, 1.0))


def _there(local: Array, low: float, high: float) -> Array:
    """The inverse of `_local`, rounded into the range."""
    return np.asarray(np.clip(low * (high / low) ** (0.5 * (local + 1)), low, high))


def _in_size(size: Array, sizes: tuple[float, float], terms: int) -> Array:
    """Chebyshev polynomials of each finite size, and 1 behind them for coarse material: (sizes, terms + 1)."""
    coarse = np.isinf(size)
    each = chebvander(_local(np.where(coarse, sizes[1], size), *sizes), terms - 1)
    return np.column_stack([np.where(coarse[:, None], 0.0, each), coarse])


def _tiles(rows: Array, count: int) -> Array:
    """Rows in C-ordered blocks of `count`, the last one filled up with zeros: (blocks, count, columns)."""
    padded = np.zeros((-(-rows.shape[0] // count) * count, rows.shape[1]))
    padded[: rows.shape[0]] = rows
    return padded.reshape(-1, count, rows.shape[1])


def compress(
    candidate: Candidate | Crystal,
    temperature: ArrayLike,
    dopings: tuple[float, float],
    sizes: tuple[float, float],
    shape: str = "grain",
    tolerance: float = 1e-6,
) -> CompressedMap:
    """Properties over whole ranges of doping and size as Chebyshev series, as close as asked to `evaluate`.

    f(n, d) = Σ_ij c_ij T_i(x) T_j(y), x and y the places of ln n and ln d in their ranges, −1 … 1. Series stand for
    ln σ, ln κ_e, ln κ_L, ln µ, S and the bipolar share of κ_e, at each temperature (K, of any shape) and for the
    shape 'grain', 'wire' or 'film'; dopings: lowest and highest (1/m³); sizes: smallest and largest (m), both
    finite; coarse material (inf) comes along by itself.

    Terms are added until `tolerance` is kept by what would follow the last and by the misses where the series'
    error turns, at the ends and between the nodes, where the direct path is asked again; where terms do
    not help, the range of doping is halved. The map's `error` is that rest and twice the largest miss together.
    All errors are relative, zT's too, but two: S, and zT by it, in shares of |S| or of 1 µV/K, whichever is larger;
    the bipolar part in shares of κ_e.
    Raises InputError where the tolerance is out of reach, with what was reached and where, and as `evaluate`.
    Source: Trefethen, Approximation Theory and Approximation Practice (SIAM, 2013).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.properties import evaluate
    >>> silicon = load_candidate("si-n")
    >>> quick = compress(silicon, 900.0, (1e25, 3e26), (1e-8, 1e-5))
    >>> doping, size = np.geomspace(1e25, 3e26, 200), np.geomspace(1e-8, 1e-5, 300)
    >>> bool(np.all(abs(quick.zt(doping, size) / evaluate(silicon, 900.0, doping[:, None], size).zt - 1) < 1e-6))
    True
    """
    one = candidate if isinstance(candidate, Crystal) else crystal(candidate)
    within(tolerance, "tolerance", FINEST, COARSEST, "(relative)")
    within(dopings, "dopings", THINNEST, DENSEST, "1/m³")
    within(sizes, "sizes", SMALLEST, LARGEST, "m")
    for key, (low, high) in (("dopings", dopings), ("sizes", sizes)):
        if low >= high:
            raise InputError(
                f"value {low:g} to {high:g} is not allowed; a range ascends", key=key, slug="out-of-range"
            )
    t = np.asarray(temperature, dtype=float)
    direct = _Direct(one, t.ravel(), sizes, shape)
    ends = pairwise([dopings[0], *(x for x in _corners(one) if dopings[0] < x < dopings[1]), dopings[1]])
    pieces = [piece for low, high in ends for piece in _pieces(direct, low, high, tolerance, _HALVINGS)]
    most, longest = (max(piece.coefficients.shape[axis] for piece in pieces) for axis in (2, 3))
    whole = np.zeros((t.size, _QUANTITIES, len(pieces), most, longest))
    for place, piece in enumerate(pieces):
        terms, last = piece.coefficients.shape[2], piece.coefficients.shape[3] - 1
        whole[:, :, place, :terms, :last] = piece.coefficients[..., :last]
        whole[:, :, place, :terms, -1] = piece.coefficients[..., last]
    return CompressedMap(
        one,
        shape,
        t,
        np.array([dopings[0], *(piece.high for piece in pieces)]),
        sizes,
        tolerance,
        max(piece.error for piece in pieces),
        whole.reshape(t.size, _QUANTITIES, -1, longest),
        np.asarray(one.dense_share * amorphous_minimum(one.phonons, t)),
    )


def _corners(one: Crystal) -> list[float]:
    """Dopings (1/m³), ascending, at which the heavy-doping factor turns."""
    if not one.electrons.impurity_knots:
        return []
    place, height = np.array(one.electrons.impurity_knots).T
    slopes = np.concatenate([[0.0], np.diff(height) / np.diff(place), [0.0]])
    return [float(x) for x in np.exp(place[slopes[:-1] != slopes[1:]])]


@dataclass(frozen=True)
class _Direct:
    """The direct path as that which has series: (temperatures, quantities, dopings, sizes)."""

    crystal: Crystal
    temperature: Array
    sizes: tuple[float, float]
    shape: str

    def sizes_at(self, local: Array) -> Array:
        """Finite sizes at places −1 … 1 of their range, and coarse material."""
        return np.append(_there(local, *self.sizes), np.inf)

    def __call__(self, doping: Array, size: Array) -> Array:
        made = evaluate_crystal(self.crystal, self.temperature[:, None, None], doping[:, None], size, self.shape)
        electronic = made.electronic_thermal_conductivity
        positive = (made.electrical_conductivity, electronic, made.lattice_thermal_conductivity, made.mobility)
        sigma, electronic_log, lattice, mobility = np.log(positive)
        pairs = made.bipolar_thermal_conductivity / electronic
        return np.stack([sigma, electronic_log, lattice, made.seebeck, mobility, pairs], axis=1)


@dataclass(frozen=True)
class _Piece:
    """Series on one piece of doping, from where the one before ends to `high`, and their error."""

    high: float
    coefficients: Array
    error: float


def _pieces(direct: _Direct, low: float, high: float, tolerance: float, halvings: int) -> Iterator[_Piece]:
    """Series from low to high doping with as few terms as do; on halves of it where the most do not.

    Twice the terms keep the dopings that there are, and those between them are where the fewer terms miss most.
    """
    nodes, sizes = chebpts2(_FEWEST_DOPINGS), direct.sizes_at(chebpts1(_enough_sizes(direct.sizes, tolerance)))
    values = direct(_there(nodes, low, high), sizes)
    while True:
        coefficients, rest_doping, rest_size = _fit(values, _SPARED * tolerance)
        error, between = rest_doping + rest_size, chebpts1(nodes.size - 1)
        if error <= tolerance:
            error += 2 * _missed(direct, low, high, np.array([-1.0, *between, 1.0]), coefficients)
            if error <= tolerance:
                yield _Piece(high, coefficients, error)
                return
        if rest_size > tolerance / 4 and sizes.size < _MOST_SIZES:
            sizes = direct.sizes_at(chebpts1(2 * sizes.size))
            values = direct(_there(nodes, low, high), sizes)
        elif nodes.size < _MOST_DOPINGS:
            values = np.insert(values, range(1, nodes.size), direct(_there(between, low, high), sizes), axis=-2)
            nodes = chebpts2(2 * nodes.size - 1)
        else:
            break
    if not halvings:
        raise InputError(
            f"value {tolerance:g} is not allowed; from {low:.3g} to {high:.3g} 1/m³ series of the most terms come "
            f"within {error:.0e}",
            key="tolerance",
            slug="out-of-range",
        )
    middle = float(np.sqrt(low * high))
    for ends in ((low, middle), (middle, high)):
        yield from _pieces(direct, *ends, tolerance, halvings - 1)


def _enough_sizes(sizes: tuple[float, float], tolerance: float) -> int:
    """Terms in ln size: coefficients fall as ρ^−k, and walls keep ln ρ = arsinh(π/ln(d_max/d_min)) (Trefethen)."""
    return int(np.ceil(np.log(10 / tolerance) / np.arcsinh(np.pi / np.log(sizes[1] / sizes[0])))) + 4


def _fit(values: Array, spared: float) -> tuple[Array, float, float]:
    """Coefficients without the last that sum to less than is spared, and what is missing by doping and by size."""
    unit = _units(values)
    in_size = _from_roots(values[..., :-1])
    by_size = np.max(np.abs(in_size) / np.min(unit, axis=-1, keepdims=True), axis=(0, 1, 2))
    by_doping = np.max(np.abs(_from_extremes(values)) / np.min(unit, axis=-2, keepdims=True), axis=(0, 1, 3))

    def kept(each: Array) -> int:
        return int(np.flatnonzero(np.cumsum(each[::-1])[::-1] > spared)[-1]) + 1

    whole = _from_extremes(np.concatenate([in_size[..., : kept(by_size)], values[..., -1:]], axis=-1))
    return whole[..., : kept(by_doping), :], _rest(by_doping), _rest(by_size)


def _rest(terms: Array) -> float:
    """Sum of the terms that would follow if they went on falling as from the middle to the last; pairs hide zeros.

    At a corner terms fall slowly, and the rest is many times the last: without one it is about the last.
    """
    pairs = terms[:-1] + terms[1:]
    middle = pairs.size // 2
    ratio = pairs[-1] / max(pairs[middle], np.finfo(float).tiny)  # all may vanish in a range next to nothing
    fall = min(ratio ** (1 / (pairs.size - 1 - middle)), _SLOWEST)
    return float(pairs[-1] * fall / (1 - fall))


def _from_roots(values: Array) -> Array:
    """Chebyshev coefficients along the last axis of what was read at `chebpts1` points."""
    found = dct(values[..., ::-1], type=2) / values.shape[-1]
    found[..., 0] /= 2
    return np.asarray(found)


def _from_extremes(values: Array) -> Array:
    """Chebyshev coefficients along the last axis but one of what was read at `chebpts2` points."""
    found = dct(values[..., ::-1, :], type=1, axis=-2) / (values.shape[-2] - 1)
    found[..., [0, -1], :] /= 2
    return np.asarray(found)


def _units(values: Array) -> Array:
    """What an error of each quantity is told in: 1 for logarithms and shares; the least for S that changes sign."""
    unit = np.ones_like(values)
    seebeck = values[:, _SEEBECK]
    turns = (np.min(seebeck, axis=(-2, -1)) < 0) & (np.max(seebeck, axis=(-2, -1)) > 0)
    unit[:, _SEEBECK] = np.where(turns[:, None, None], _LEAST_SEEBECK, np.maximum(np.abs(seebeck), _LEAST_SEEBECK))
    return unit


def _missed(direct: _Direct, low: float, high: float, local: Array, coefficients: Array) -> float:
    """Largest miss, of any quantity or zT, at those places of doping and at sizes where the error turns."""
    terms, lengths = coefficients.shape[-2], coefficients.shape[-1] - 1
    size = direct.sizes_at(chebpts2(lengths + 1))
    asked = direct(_there(local, low, high), size)
    made = chebvander(local, terms - 1) @ coefficients @ _in_size(size, direct.sizes, lengths).T
    least = np.maximum(np.abs(asked[:, _SEEBECK]), _LEAST_SEEBECK)

    def figure(values: Array, seebeck: Array) -> Array:
        heat = np.exp(values[:, _ELECTRONIC]) + np.exp(values[:, _LATTICE])
        return np.asarray(seebeck**2 * np.exp(values[:, _SIGMA]) / heat)

    miss = np.abs(figure(made, made[:, _SEEBECK]) - figure(asked, asked[:, _SEEBECK])) / figure(asked, least)
    return float(max(np.max(np.abs(made - asked) / _units(asked)), np.max(miss)))
