"""The numbers behind the named functions, vectorised over spectra of shape ``(M, N)``.

Components that are zero, or negative by rounding, count as absent: 0 log 0 = 0, and a rank counts positive components.
"""

from __future__ import annotations

from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


def power_sum(x: FloatArray, q: float) -> FloatArray:
    """Σ λ_i^q over the positive components."""
    present = x > 0
    powers: FloatArray = np.where(present, np.where(present, x, 1.0) ** q, 0.0)
    return np.asarray(powers.sum(axis=-1))


def _excess(x: FloatArray, r: float) -> FloatArray:
    """Σ λ_i^(1+r) − 1 for a small r, with no cancellation: the terms λ_i (λ_i^r − 1) are summed instead."""
    present = x > 0
    terms: FloatArray = np.where(present, x * np.expm1(r * np.log(np.where(present, x, 1.0))), 0.0)
    return np.asarray(terms.sum(axis=-1))


def von_neumann(x: FloatArray) -> FloatArray:
    """−Σ λ_i ln λ_i."""
    present = x > 0
    terms: FloatArray = np.where(present, -x * np.log(np.where(present, x, 1.0)), 0.0)
    return np.asarray(terms.sum(axis=-1))


def min_entropy(x: FloatArray) -> FloatArray:
    """−ln max λ_i."""
    return np.asarray(-np.log(x.max(axis=-1)))


def renyi(x: FloatArray, order: Fraction) -> FloatArray:
    """ln(Σ λ_i^q)/(1 − q)."""
    r = float(order - 1)
    if abs(r) < 0.5:
        return np.asarray(np.log1p(_excess(x, r)) / -r)
    # The largest component is taken out, so that no power of a high order underflows.
    top = x.max(axis=-1, keepdims=True)
    inner = np.log(power_sum(x / top, 1 + r))
    return np.asarray((inner + (1 + r) * np.log(top[..., 0])) / -r)


def tsallis(x: FloatArray, order: Fraction) -> FloatArray:
    """(1 − Σ λ_i^q)/(q − 1)."""
    r = float(order - 1)
    return np.asarray(-_excess(x, r) / r) if abs(r) < 0.5 else np.asarray((1 - power_sum(x, 1 + r)) / r)


def nth_largest(x: FloatArray, k: int) -> FloatArray:
    """The k-th largest component, k from 1."""
    return np.asarray(-np.sort(-x, axis=-1)[..., k - 1])


def gap(x: FloatArray, k: int) -> FloatArray:
    """λ_k − λ_{k+1} of the ordered components, k from 1."""
    down = -np.sort(-x, axis=-1)
    return np.asarray(down[..., k - 1] - down[..., k])


def rank(x: FloatArray, above: float) -> FloatArray:
    """Number of components greater than `above`."""
    return np.asarray((x > above).sum(axis=-1), dtype=np.float64)


def elementary(x: FloatArray, k: int) -> FloatArray:
    """e_k, by multiplying out Π (1 + λ_i z)."""
    sums = np.zeros((*x.shape[:-1], k + 1))
    sums[..., 0] = 1
    for i in range(x.shape[-1]):
        sums[..., 1:] = sums[..., 1:] + x[..., i, None] * sums[..., :-1]
    return np.asarray(sums[..., k])


def trace_distance(x: FloatArray) -> FloatArray:
    """½ Σ |λ_i − 1/N|."""
    return np.asarray(np.abs(x - 1 / x.shape[-1]).sum(axis=-1) / 2)


def fidelity(x: FloatArray) -> FloatArray:
    """(Σ √λ_i)²/N."""
    return np.asarray(power_sum(x, 0.5) ** 2 / x.shape[-1])


def relative_entropy(x: FloatArray) -> FloatArray:
    """ln N + Σ λ_i ln λ_i."""
    return np.asarray(np.log(x.shape[-1]) - von_neumann(x))
