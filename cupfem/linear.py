"""Symmetric matrices on a fixed pattern, and direct solvers behind one small interface.

A wall numbered along its height gives a narrow band, for which LAPACK's band Cholesky (`dpbtrf`, `dpbtrs`)
is the fastest direct
solver that needs no further package. A mesh from elsewhere has no such numbering; there SuperLU with
symmetric pivoting serves. Both sit behind `Pattern.factor`.

Only the lower triangle is stored: one set of indices serves the mass and the stiffness matrix.
"""

from __future__ import annotations

from typing import Protocol

import numpy as np
import scipy.sparse as sparse
from numpy.typing import NDArray
from scipy.linalg import lapack
from scipy.sparse.linalg import splu

from cupfem.errors import ConvergenceError

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]


class Factor(Protocol):
    """A factorised matrix."""

    def solve(self, right_hand_side: Floats) -> Floats:
        """Solution for right-hand sides of shape `[n]` or `[n, m]`."""


class Pattern:
    """Lower triangle of a symmetric matrix whose entries come from element matrices.

    Parameters
    ----------
    element_dofs:
        Numbers of the unknowns of each element, shape `[local, element]`, or a list of such arrays (elements
        and contacts).
    size:
        Number of unknowns n.
    """

    def __init__(self, element_dofs: Ints | list[Ints], size: int):
        groups = element_dofs if isinstance(element_dofs, list) else [element_dofs]
        keys = np.unique(np.concatenate([np.unique(_lower_keys(dofs, size)) for dofs in groups]))
        self.size = size
        self._keys = keys
        self._rows = (keys // size).astype(np.int32)
        self._columns = (keys % size).astype(np.int32)
        self._starts = np.searchsorted(self._rows, np.arange(size + 1)).astype(np.int32)
        self.half_bandwidth = int(np.max(self._rows - self._columns, initial=0))
        self.banded = _band_pays(size, self.half_bandwidth)
        # In LAPACK's lower band storage, column by column: entry (i, j) stands at row i - j of column j.
        self._band = self._columns.astype(np.int64) * self.half_bandwidth + self._rows
        self._diagonal = np.flatnonzero(self._rows == self._columns)

    @property
    def entries(self) -> int:
        """Number of stored entries (lower triangle)."""
        return len(self._keys)

    def positions(self, element_dofs: Ints) -> tuple[Ints, Ints]:
        """Where element matrices go: indices into the flat element data, and the stored entry of each.

        The element data has shape `[element, local, local]`; entries above the diagonal are left out.
        """
        local, count = element_dofs.shape
        rows = np.broadcast_to(element_dofs.T[:, :, None], (count, local, local)).ravel()
        columns = np.broadcast_to(element_dofs.T[:, None, :], (count, local, local)).ravel()
        taken = np.flatnonzero(rows >= columns)
        keys = rows[taken].astype(np.int64) * self.size + columns[taken]
        return taken, np.searchsorted(self._keys, keys)

    def gather(self, element_dofs: Ints, matrices: Floats) -> Floats:
        """Stored entries, shape `[entries]`, of the sum of element matrices `[element, local, local]`."""
        taken, entry = self.positions(element_dofs)
        return np.bincount(entry, weights=matrices.ravel()[taken], minlength=self.entries).astype(
            float, copy=False
        )

    def multiply(self, data: Floats, vector: Floats) -> Floats:
        """Matrix times vector."""
        lower = sparse.csr_array((data, self._columns, self._starts), shape=(self.size, self.size))
        return np.asarray(lower @ vector + lower.T @ vector - data[self._diagonal] * vector)

    def operator(self, data: Floats) -> Operator:
        """The matrix as an object that multiplies many times."""
        return Operator(self, data)

    def factor(self, data: Floats, fixed: Ints | None = None) -> Factor:
        """Factorise; rows and columns of `fixed` unknowns become the identity.

        Raises
        ------
        ConvergenceError
            If the matrix is not positive definite.
        """
        if fixed is not None and len(fixed):
            data = self._with_identity(data, fixed)
        return _BandFactor(self, data) if self.banded else _SparseFactor(self, data)

    def to_sparse(self, data: Floats) -> sparse.csc_array:
        """The full symmetric matrix."""
        lower = sparse.coo_array((data, (self._rows, self._columns)), shape=(self.size, self.size)).tocsc()
        strict = sparse.tril(lower, -1)
        return sparse.csc_array(lower + strict.T)

    def _with_identity(self, data: Floats, fixed: Ints) -> Floats:
        marked = np.zeros(self.size, dtype=bool)
        marked[fixed] = True
        out = np.where(marked[self._rows] | marked[self._columns], 0.0, data)
        out[self._diagonal[fixed]] = 1.0
        return out


class Operator:
    """A matrix on a pattern, held ready for repeated products."""

    def __init__(self, pattern: Pattern, data: Floats):
        self.pattern = pattern
        self.data = data
        shape = (pattern.size, pattern.size)
        self._lower = sparse.csr_array((data, pattern._columns, pattern._starts), shape=shape)
        self._upper = self._lower.T
        self._diagonal = data[pattern._diagonal]

    def __matmul__(self, vector: Floats) -> Floats:
        return np.asarray(self._lower @ vector + self._upper @ vector - self._diagonal * vector)


class _BandFactor:
    """Band Cholesky by LAPACK."""

    def __init__(self, pattern: Pattern, data: Floats):
        width = pattern.half_bandwidth + 1
        band = np.zeros(pattern.size * width)
        band[pattern._band] = data
        self._factor, info = lapack.dpbtrf(
            band.reshape((width, pattern.size), order="F"), lower=1, overwrite_ab=1
        )
        if info != 0:
            raise ConvergenceError(f"the matrix is not positive definite at unknown {info - 1}")

    def solve(self, right_hand_side: Floats) -> Floats:
        solution, _ = lapack.dpbtrs(self._factor, right_hand_side, lower=1)
        return np.asarray(solution)


class _SparseFactor:
    """SuperLU with the options for symmetric positive definite matrices."""

    def __init__(self, pattern: Pattern, data: Floats):
        options = {"SymmetricMode": True}
        self._factor = splu(
            pattern.to_sparse(data), permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options=options
        )

    def solve(self, right_hand_side: Floats) -> Floats:
        return np.asarray(self._factor.solve(right_hand_side))


def _lower_keys(element_dofs: Ints, size: int) -> Ints:
    dofs = element_dofs.astype(np.int64)
    rows, columns = np.tril_indices(len(dofs))
    low = np.minimum(dofs[rows], dofs[columns])
    high = np.maximum(dofs[rows], dofs[columns])
    return (high * size + low).ravel()


def _band_pays(size: int, half_bandwidth: int) -> bool:
    """Band Cholesky costs n b^2; past this width nested orderings with their overhead are cheaper (measured,
    common practice)."""
    return half_bandwidth <= max(200, 2 * int(np.sqrt(size)))
