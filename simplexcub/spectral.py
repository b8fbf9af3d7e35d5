"""A basis of the symmetric polynomials for many components, at a cost that does not grow with N!.

Generators are h_2, h_3, … with h_k a combination of the centred power sums g_j = Σ_i (N λ_i − 1)^j / N, j ≤ k, that is
orthonormal over the measure: E[h_j] = 0, E[h_j h_k] = δ_jk, from exact means and covariances. Products of normalised
Hermite polynomials, ψ_e = Π_k He_{e_k}(h_k)/√e_k! with Σ k e_k ≤ degree, span the symmetric polynomials of that degree.
They are orthonormal in the limit of large N, where linear statistics of a spectrum are Gaussian, and nearly dependent
far from it; so the basis is φ = ψ C with C from their singular values on sampled spectra. Raw power sums would lose all
digits. Stored doubles *define* the functions, so the same formulas in long integers give values and means to any number
of digits.

References: K. Johansson, Duke Math. J. 91 (1998) 151, for the Gaussian limit.
"""

from __future__ import annotations

import math
from functools import lru_cache
from itertools import product

import numpy as np
from mpmath import mp
from numpy.typing import NDArray

from simplexcub.basis import centred_means, fixed_point
from simplexcub.measures import Measure
from simplexcub.symmetry import OrbitType

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.object_]  # Python integers of any length
Exponents = tuple[int, ...]
Polynomial = dict[Exponents, int]

_GUARD = 24  # bits per degree: coefficients of high degree are large and cancel again
_NOISE_POINTS = 6
_SAMPLES = 30  # spectra per function that C is made from
_FLATTEST = 1e-4  # of the largest singular value: what is smaller would only amplify noise


class SpectralInvariants:
    """Symmetric polynomials of degree ≤ `degree` over `measure`, in the interface of :class:`invariants.Basis`.

    Attributes
    ----------
    exponents : list of tuple of int
        e_2 … e_top of each function, by degree; top = min(N, degree).
    """

    def __init__(self, measure: Measure, degree: int) -> None:
        self._measure = measure
        self._n = measure.N
        self._powers = range(2, min(measure.N, degree) + 1)
        self._guard = _GUARD * (degree + 2)
        found = _exponents(degree, self._powers)
        self.exponents: list[Exponents] = sorted(found, key=lambda e: (self._weight(e), e))
        self._highest = max((max(e, default=0) for e in self.exponents), default=0)
        self._index = np.array(self.exponents, dtype=np.int64).reshape(len(self.exponents), len(self._powers))
        self._centre, self._mix = self._orthonormal()
        j = np.arange(1.0, self._highest + 1)
        self._up, self._down = 1 / np.sqrt(j), np.sqrt((j - 1) / j)  # h_j = up x h_{j−1} − down h_{j−2}
        self._combine = np.eye(len(self))
        self._combine = self._whitening()
        self.noise = self._measured_noise()

    def __len__(self) -> int:
        return len(self.exponents)

    def _weight(self, exponents: Exponents) -> int:
        return sum(k * e for k, e in zip(self._powers, exponents, strict=True))

    def _orthonormal(self) -> tuple[FloatArray, FloatArray]:
        """E[g_k], and the lower triangular matrix that turns g − E[g] into h."""
        count = len(self._powers)
        if not count:
            return np.zeros(0), np.zeros((0, 0))
        single = [tuple(int(i == a) for i in range(count)) for a in range(count)]
        pairs = [tuple(x + y for x, y in zip(a, b, strict=True)) for a in single for b in single]
        means = centred_means(self._measure, (*single, *pairs))
        first, second = means[:count], means[count:]
        covariance = [[second[a * count + b] - first[a] * first[b] for b in range(count)] for a in range(count)]
        with mp.workdps(60 + 4 * count):
            matrix = mp.matrix([[mp.mpf(v.numerator) / v.denominator for v in row] for row in covariance])
            inverse = mp.cholesky(matrix) ** -1
            mix = np.array([[float(inverse[a, b]) for b in range(count)] for a in range(count)])
        return np.array([float(v) for v in first]), mix

    def _whitening(self) -> FloatArray:
        """The matrix C that makes the functions about orthonormal on sampled spectra."""
        spectra = self._measure.sample(np.random.default_rng(1), _SAMPLES * len(self))
        values = self.jet(spectra, OrbitType(tuple(range(self._n)), 1))[:, 0] / math.sqrt(len(spectra))
        _, singular, rows = np.linalg.svd(values, full_matrices=False)
        combine: FloatArray = rows.T / np.maximum(singular, _FLATTEST * singular[0])
        return combine

    def _measured_noise(self) -> float:
        """Largest difference between the functions in doubles and in long integers, at a few random spectra."""
        bits = 200
        values = self._measure.sample(np.random.default_rng(0), _NOISE_POINTS)
        exact = fixed_point(values, bits)
        exact[:, -1] = (1 << bits) - exact[:, :-1].sum(axis=1)
        type_ = OrbitType(tuple(range(self._n)), 1)
        doubles = self.jet(_to_doubles(exact, bits), type_)[:, 0]
        return float(np.abs(doubles - _to_doubles(self._values_fixed(exact, type_, bits), bits)).max())

    def jet(self, values: FloatArray, type_: OrbitType) -> FloatArray:
        m = np.array(type_.multiplicities, dtype=float)
        y = self._n * values - 1.0
        powers = np.array(self._powers)[:, None, None]
        g = (y**powers) @ m / self._n  # (K, P)
        slope = powers * m[:-1] * (y[:, :-1] ** (powers - 1) - y[:, -1:] ** (powers - 1))  # (K, P, k − 1)
        h = self._mix @ (g - self._centre[:, None])
        dh = np.einsum("ab,bpj->apj", self._mix, slope)
        table = np.ones((self._highest + 1, *h.shape))
        for j in range(1, self._highest + 1):
            table[j] = self._up[j - 1] * h * table[j - 1]
            if j > 1:
                table[j] -= self._down[j - 1] * table[j - 2]
        which = np.arange(len(self._powers))[:, None]
        e = self._index.T  # (K, E)
        factors = table[e, which]  # (K, E, P)
        lowered = np.sqrt(e)[:, :, None] * table[np.maximum(e - 1, 0), which]
        before = np.ones((len(e) + 1, *factors.shape[1:]))
        after = np.ones_like(before)
        for a in range(len(e)):
            before[a + 1] = before[a] * factors[a]
            after[a + 1] = after[a] * factors[-1 - a]
        rest = before[:-1] * after[-2::-1] if len(e) else np.empty((0, *factors.shape[1:]))
        out = np.empty((len(values), len(m), len(self)))
        out[:, 0] = before[-1].T
        out[:, 1:] = np.einsum("aep,apj->pje", lowered * rest, dh)
        return out @ self._combine

    def sums_fixed(self, values: IntArray, weights: IntArray, type_: OrbitType, bits: int) -> IntArray:
        sums: IntArray = weights.dot(self._values_fixed(values, type_, bits)) >> bits
        return sums

    def _values_fixed(self, values: IntArray, type_: OrbitType, bits: int) -> IntArray:
        """The functions in integers scaled by 2^bits, all products in more bits; shape (P, E)."""
        work = bits + self._guard
        one = 1 << work
        y = self._n * (values << self._guard) - one
        m = np.array(type_.multiplicities, dtype=object)
        power, rows = y, []
        for _ in self._powers:
            power = (power * y) >> work
            rows.append(power.dot(m) // self._n)
        out = np.full((len(values), len(self)), one, dtype=object)
        if not rows:
            return self._combined(out, work, self._guard)
        g = np.stack(rows, axis=1)
        h = (g - fixed_point(self._centre, work)).dot(fixed_point(self._mix, work).T) >> work
        up, down = fixed_point(self._up, work), fixed_point(self._down, work)
        table = [np.full(h.shape, one, dtype=object)]
        for j in range(1, self._highest + 1):
            new = ((h * table[-1]) >> work) * up[j - 1] >> work
            table.append(new if j == 1 else new - (down[j - 1] * table[-2] >> work))
        for i, e in enumerate(self.exponents):
            for a, power_of in enumerate(e):
                if power_of:
                    out[:, i] = out[:, i] * table[power_of][:, a] >> work
        return self._combined(out, work, self._guard)

    def _combined(self, functions: IntArray, work: int, guard: int) -> IntArray:
        """ψ C, without the guard bits."""
        combined: IntArray = functions.dot(fixed_point(self._combine, work)) >> (work + guard)
        return combined

    def means_fixed(self, measure: Measure, bits: int) -> IntArray:
        """E[φ], from the polynomials in g_2, g_3, … that the functions are and exact means of their monomials."""
        work = bits + 2 * self._guard
        count = len(self._powers)
        zero = (0,) * count
        mix, centre = fixed_point(self._mix, work), fixed_point(self._centre, work)
        up, down = fixed_point(self._up, work), fixed_point(self._down, work)
        one: Polynomial = {zero: 1 << work}
        tables = []
        for a in range(count):
            linear: Polynomial = {zero: -sum(int(mix[a, b]) * int(centre[b]) for b in range(count)) >> work}
            for b in range(a + 1):
                linear[tuple(int(i == b) for i in range(count))] = int(mix[a, b])
            table = [one]
            for j in range(1, max(e[a] for e in self.exponents) + 1):
                new = {key: v * int(up[j - 1]) >> work for key, v in _multiply(linear, table[-1], work).items()}
                for key, v in table[-2].items() if j > 1 else ():
                    new[key] = new.get(key, 0) - (int(down[j - 1]) * v >> work)
                table.append(new)
            tables.append(table)
        means = dict(zip(self.exponents, centred_means(measure, tuple(self.exponents)), strict=True))
        scaled = {e: (v.numerator << work) // v.denominator for e, v in means.items()}
        result = []
        for e in self.exponents:
            terms = one
            for a, power in enumerate(e):
                terms = _multiply(terms, tables[a][power], work) if power else terms
            result.append(sum(v * scaled[key] for key, v in terms.items()) >> work)
        return self._combined(np.array(result, dtype=object), work, work - bits)


def _multiply(a: Polynomial, b: Polynomial, bits: int) -> Polynomial:
    result: Polynomial = {}
    for (x, p), (y, q) in product(a.items(), b.items()):
        key = tuple(i + j for i, j in zip(x, y, strict=True))
        result[key] = result.get(key, 0) + p * q
    return {key: v >> bits for key, v in result.items()}


def _exponents(degree: int, powers: range) -> list[Exponents]:
    """Every (e_k) over `powers` with Σ k e_k ≤ degree."""
    if not powers:
        return [()]
    k, rest = powers[0], powers[1:]
    return [(e, *tail) for e in range(degree // k + 1) for tail in _exponents(degree - k * e, rest)]


def _to_doubles(integers: IntArray, bits: int) -> FloatArray:
    return np.array([[math.ldexp(float(v), -bits) for v in row] for row in integers])


@lru_cache(maxsize=32)
def spectral_basis(measure: Measure, degree: int) -> SpectralInvariants:
    """The basis for a measure and a degree, built once per process."""
    return SpectralInvariants(measure, degree)
