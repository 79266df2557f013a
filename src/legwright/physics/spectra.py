"""Conduction sorted by mean free path: weights on a fixed mesh of ln Λ, from which any size follows by one product.

A boundary acts on a carrier through Λ/d alone. So the sums over energies or modes, of which there are hundreds at
each temperature and doping, are first gathered on a mesh of mean free paths shared by all points; a size then
costs one dot product. The gathering is Chebyshev interpolation of the boundary factor in ln Λ on equal pieces:
exact to the 1e-9 to which that factor is a polynomial on a piece.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

_PER_PIECE = 12


@dataclass(frozen=True)
class PathMesh:
    """Mean free paths from shortest to longest (m, > 0) on equal pieces of ln Λ; others move to the ends."""

    shortest: float
    longest: float
    pieces: int

    @property
    def width(self) -> float:
        """Width of one piece in ln Λ."""
        return float(np.log(self.longest / self.shortest)) / self.pieces

    @cached_property
    def paths(self) -> Array:
        """The mesh itself, m, ascending by piece; shape (pieces × nodes,)."""
        centres = np.log(self.shortest) + self.width * (np.arange(self.pieces) + 0.5)
        return np.asarray(np.exp(centres[:, None] + 0.5 * self.width * _NODES).ravel())

    def gather(self, path: Array, values: Array) -> Array:
        """Weights w with Σ_j w_j F(Λ_j) = Σ_i values_i F(path_i) for every F smooth in ln Λ.

        path: (..., n) in m; values: (..., k, n); result (..., k, pieces × nodes).
        """
        position = (np.log(path) - np.log(self.shortest)) / self.width
        piece = np.clip(position.astype(np.intp), 0, self.pieces - 1)
        local = np.clip(2 * (position - piece) - 1, -1.0, 1.0)
        rows, columns = int(np.prod(path.shape[:-1], dtype=np.intp)), path.shape[-1]
        slot = (np.arange(rows)[:, None] * self.pieces + piece.reshape(rows, columns)).ravel()
        flat = np.moveaxis(values, -2, 0).reshape(values.shape[-2], -1)
        moments = np.empty((flat.shape[0], _PER_PIECE, rows * self.pieces))
        before, now = np.ones(slot.size), local.ravel()
        for degree in range(_PER_PIECE):
            for k, value in enumerate(flat):
                moments[k, degree] = np.bincount(slot, value * before, rows * self.pieces)
            before, now = now, 2 * local.ravel() * now - before
        by_degree = np.ascontiguousarray(np.moveaxis(moments.reshape(-1, _PER_PIECE, rows, self.pieces), 1, -1))
        by_node = np.einsum("krpd,jd->rkpj", by_degree, _BASIS)
        return np.asarray(by_node.reshape(*path.shape[:-1], -1, self.pieces * _PER_PIECE))


_NODES = np.cos(np.pi * (np.arange(_PER_PIECE) + 0.5) / _PER_PIECE)
#: Lagrange polynomials of the nodes in Chebyshev polynomials: ℓ_j = Σ_d _BASIS[j, d] T_d
_BASIS = (
    np.cos(np.arange(_PER_PIECE) * np.arccos(_NODES)[:, None])
    * np.where(np.arange(_PER_PIECE), 2.0, 1.0)
    / _PER_PIECE
)


def through(weights: Array, factor: Array) -> Array:
    """Σ_j w_j F_j for every point: weights (..., k, paths), factor (..., paths), which broadcast; result (..., k).

    One dot product of fixed length for each number, so its bits do not depend on what else is computed. Units are
    the weights', the factor is dimensionless. Raises ValueError where the shapes do not broadcast. By definition.

    >>> through(np.array([[1.0, 2.0], [3.0, 4.0]]), np.array([1.0, 0.5])).tolist()
    [2.0, 5.0]
    """
    return np.asarray(np.einsum("...kj,...j->...k", weights, factor))
