"""Independent draws from every family, vectorised over the sample.

References: K. Życzkowski, H.-J. Sommers, J. Phys. A 34 (2001) 7111 (induced); V. A. Osipov, H.-J. Sommers,
K. Życzkowski, J. Phys. A 43 (2010) 055302 (Bures); A. Borodin, G. Olshanski, Comm. Math. Phys. 223 (2001) 87 (corners
of the Cauchy ensemble); I. Dumitriu, A. Edelman, J. Math. Phys. 43 (2002) 5830 (bidiagonal β-ensembles).
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from simplexcub.errors import InputError

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def sample_size(size: object) -> int:
    """The number of draws as an integer of at least 0.

    Raises
    ------
    InputError
        Anything else.
    """
    if isinstance(size, bool) or not isinstance(size, int | np.integer) or size < 0:
        raise InputError("size must be an integer of at least 0", size)
    return int(size)


def on_simplex(values: NDArray[Any]) -> FloatArray:
    """Non-negative rows scaled to sum 1."""
    spectra: FloatArray = np.clip(values, 0.0, None)
    spectra /= spectra.sum(axis=1, keepdims=True)
    return spectra


def complex_normal(rng: np.random.Generator, shape: tuple[int, ...]) -> ComplexArray:
    """Standard complex normal variables, E|z|² = 1."""
    z: ComplexArray = (rng.standard_normal(shape) + 1j * rng.standard_normal(shape)) / np.sqrt(2)
    return z


def induced_spectra(rng: np.random.Generator, n: int, k: int, size: int) -> FloatArray:
    """Spectra of G G†/Tr G G† with a complex N×K Ginibre matrix G."""
    ginibre = complex_normal(rng, (size, n, k))
    return on_simplex(np.linalg.eigvalsh(ginibre @ ginibre.conj().transpose(0, 2, 1)))


def cauchy_matrices(rng: np.random.Generator, n: int, kappa: float, size: int) -> ComplexArray:
    """Hermitian H with density ∝ det(1 + H²)^{−κ}, grown corner by corner.

    The corner A of one row less follows the same law with κ − 1. Given A, write the new column as (1 + A²)^{1/2} η and
    the new diagonal entry as η†Aη + (1 + |η|²) y: then |η|² is a beta-prime variable and y a scaled Student variable.
    """
    h = np.zeros((size, n, n), dtype=np.complex128)
    for m in range(n):
        power = kappa - (n - 1 - m)
        y = rng.standard_normal(size) / np.sqrt(2 * rng.gamma(power - 0.5, size=size))
        if not m:
            h[:, 0, 0] = y
            continue
        direction = complex_normal(rng, (size, m))
        eta = direction / np.sqrt(rng.gamma(2 * power - 1 - m, size=(size, 1)))
        values, vectors = np.linalg.eigh(h[:, :m, :m])
        rotated = np.einsum("sji,sj->si", vectors.conj(), eta)
        column = np.einsum("sij,sj->si", vectors, np.sqrt(1 + values**2) * rotated)
        h[:, :m, m] = column
        h[:, m, :m] = column.conj()
        weight = np.abs(rotated) ** 2
        h[:, m, m] = (values * weight).sum(axis=1) + (1 + weight.sum(axis=1)) * y
    return h


def bures_spectra(rng: np.random.Generator, n: int, c: float, size: int) -> FloatArray:
    """Spectra of (1 + U) G G† (1 + U†) over its trace, for the Bures–Hall measure of exponent c.

    With the Cayley transform U = (1 + iH)/(1 − iH), 1 + U = 2/(1 − iH); G is the Cholesky factor of a Wishart matrix of
    κ = N + c + 1/2 degrees of freedom, which need not be an integer.
    """
    kappa = n + c + 0.5
    h = cauchy_matrices(rng, n, kappa, size)
    lower = np.tril(complex_normal(rng, (size, n, n)), -1)
    rows = np.arange(n)
    lower[:, rows, rows] = np.sqrt(rng.gamma(kappa - rows, size=(size, n)))
    factor = np.linalg.solve(np.eye(n) - 1j * h, lower)
    return on_simplex(np.linalg.svd(factor, compute_uv=False) ** 2)


def beta_spectra(rng: np.random.Generator, n: int, beta: float, c: float, size: int) -> FloatArray:
    """Spectra of the fixed-trace β-ensemble ∝ Π λ_i^c Π |λ_i − λ_j|^β, from a bidiagonal matrix."""
    rows = np.arange(n)
    bidiagonal = np.zeros((size, n, n))
    bidiagonal[:, rows, rows] = np.sqrt(rng.gamma(c + 1 + beta / 2 * (n - 1 - rows), size=(size, n)))
    below = rows[:-1]
    bidiagonal[:, below + 1, below] = np.sqrt(rng.gamma(beta / 2 * (n - 1 - below), size=(size, n - 1)))
    return on_simplex(np.linalg.svd(bidiagonal, compute_uv=False) ** 2)
