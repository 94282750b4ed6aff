"""Matrices on a fixed pattern: assembly, products, and two direct solvers that must agree."""

import numpy as np
import pytest

from cupfem.errors import ConvergenceError
from cupfem.linear import Pattern


@pytest.fixture
def case():
    """Elements of four unknowns in a chain, with symmetric positive definite element matrices."""
    generator = np.random.default_rng(7)
    first = 2 * np.arange(30)
    dofs = np.array([first, first + 1, first + 2, first + 3])
    root = generator.normal(size=(30, 4, 4))
    return Pattern(dofs, 62), dofs, root @ root.transpose(0, 2, 1) + 0.1 * np.eye(4)


def dense(dofs, matrices, size):
    full = np.zeros((size, size))
    for element, matrix in zip(dofs.T, matrices, strict=True):
        full[np.ix_(element, element)] += matrix
    return full


def test_assembly_and_products(case):
    """Against a dense matrix that NumPy sums element by element."""
    pattern, dofs, matrices = case
    data = pattern.gather(dofs, matrices)
    full = dense(dofs, matrices, 62)
    vector = np.linspace(-1.0, 2.0, 62)
    np.testing.assert_allclose(pattern.to_sparse(data).toarray(), full, atol=1e-13)
    np.testing.assert_allclose(pattern.operator(data) @ vector, full @ vector, atol=1e-12)
    assert pattern.half_bandwidth == 3


@pytest.mark.parametrize("banded", [True, False])
@pytest.mark.parametrize("columns", [(), (3,)])
def test_solvers(case, banded, columns):
    """Band Cholesky and SuperLU against NumPy's dense LU, for one and for several right-hand sides."""
    pattern, dofs, matrices = case
    pattern.banded = banded
    data = pattern.gather(dofs, matrices)
    right = np.random.default_rng(1).normal(size=(62, *columns))
    found = pattern.factor(data).solve(right)
    np.testing.assert_allclose(found, np.linalg.solve(dense(dofs, matrices, 62), right), rtol=1e-9, atol=1e-9)


@pytest.mark.parametrize("banded", [True, False])
def test_fixed_unknowns(case, banded):
    """Rows and columns of fixed unknowns become those of the identity."""
    pattern, dofs, matrices = case
    pattern.banded = banded
    fixed = np.array([0, 17, 61])
    full = dense(dofs, matrices, 62)
    full[fixed] = 0.0
    full[:, fixed] = 0.0
    full[fixed, fixed] = 1.0
    right = np.linspace(1.0, 2.0, 62)
    found = pattern.factor(pattern.gather(dofs, matrices), fixed).solve(right)
    np.testing.assert_allclose(found, np.linalg.solve(full, right), rtol=1e-9)


def test_matrix_that_is_not_positive_definite(case):
    pattern, dofs, matrices = case
    with pytest.raises(ConvergenceError, match="not positive definite"):
        pattern.factor(-pattern.gather(dofs, matrices))
