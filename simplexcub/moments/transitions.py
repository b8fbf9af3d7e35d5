"""Changes of basis between monomial symmetric functions, power sums and Schur functions.

In N variables, with M_a the *augmented* monomial Σ Π λ_{i_j}^{a_j} over distinct indices i_1, i_2, …:

- M_a in power sums: M_(a, b) = p_b M_a − Σ_j M_(…, a_j + b, …);
- p_μ in Schur functions: Murnaghan–Nakayama, one border strip per part, so the coefficients are the characters χ^ν_μ;
- s_ν in monomials: Kostka numbers, one horizontal strip per part.

The cost of each depends on the degree alone. Nothing here knows of a measure.

Reference: I. G. Macdonald, *Symmetric Functions and Hall Polynomials* (1995), I.5–I.7.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator
from functools import lru_cache
from itertools import product

Expansion = dict[tuple[int, ...], int]


@lru_cache(maxsize=8192)
def augmented_in_power_sums(parts: tuple[int, ...]) -> Expansion:
    """Coefficients of M_parts in power sums p_μ; `parts` is a partition.

    Examples
    --------
    >>> augmented_in_power_sums((1, 1))
    {(1, 1): 1, (2,): -1}
    """
    if len(parts) <= 1:
        return {parts: 1}
    rest, last = parts[:-1], parts[-1]
    total: dict[tuple[int, ...], int] = defaultdict(int)
    for mu, coefficient in augmented_in_power_sums(rest).items():
        total[_insert(mu, last)] += coefficient
    for j in range(len(rest)):
        merged = _insert(rest[:j] + rest[j + 1 :], rest[j] + last)
        for mu, coefficient in augmented_in_power_sums(merged).items():
            total[mu] -= coefficient
    return {mu: coefficient for mu, coefficient in total.items() if coefficient}


@lru_cache(maxsize=8192)
def power_sums_in_augmented(parts: tuple[int, ...]) -> Expansion:
    """Coefficients of p_parts in augmented monomials: p_b M_a = M_(a, b) + Σ_j M_(…, a_j + b, …).

    Examples
    --------
    >>> power_sums_in_augmented((2, 1))
    {(2, 1): 1, (3,): 1}
    """
    if not parts:
        return {(): 1}
    last = parts[-1]
    total: dict[tuple[int, ...], int] = defaultdict(int)
    for a, coefficient in power_sums_in_augmented(parts[:-1]).items():
        total[_insert(a, last)] += coefficient
        for j in range(len(a)):
            total[_insert(a[:j] + a[j + 1 :], a[j] + last)] += coefficient
    return dict(total)


def _insert(parts: tuple[int, ...], part: int) -> tuple[int, ...]:
    return tuple(sorted((*parts, part), reverse=True))


@lru_cache(maxsize=8192)
def power_sums_in_schur(parts: tuple[int, ...], rows: int) -> Expansion:
    """Coefficients χ^ν_parts of p_parts in Schur functions s_ν of at most `rows` rows.

    Examples
    --------
    >>> power_sums_in_schur((2,), rows=2)
    {(2,): 1, (1, 1): -1}
    """
    if not parts:
        return {(): 1}
    total: dict[tuple[int, ...], int] = defaultdict(int)
    for nu, coefficient in power_sums_in_schur(parts[:-1], rows).items():
        for sign, larger in _add_border_strip(nu, parts[-1], rows):
            total[larger] += sign * coefficient
    return {nu: coefficient for nu, coefficient in total.items() if coefficient}


def _add_border_strip(nu: tuple[int, ...], size: int, rows: int) -> Iterator[tuple[int, tuple[int, ...]]]:
    """Sign and result of every border strip of `size` boxes on `nu`, as beads that jump up the abacus."""
    length = min(rows, len(nu) + size)
    padded = nu + (0,) * (length - len(nu))
    beads = [part + length - 1 - i for i, part in enumerate(padded)]
    for i, bead in enumerate(beads):
        target = bead + size
        above = i
        while above and beads[above - 1] < target:
            above -= 1
        if above and beads[above - 1] == target:
            continue
        larger = [*padded[:above], padded[i] + size - (i - above), *(p + 1 for p in padded[above:i]), *padded[i + 1 :]]
        while larger and not larger[-1]:
            larger.pop()
        yield (-1 if (i - above) % 2 else 1), tuple(larger)


@lru_cache(maxsize=262144)
def kostka(nu: tuple[int, ...], mu: tuple[int, ...]) -> int:
    """Kostka number K_{ν μ}: coefficient of the monomial m_μ in the Schur function s_ν.

    Examples
    --------
    >>> kostka((2, 1), (1, 1, 1))
    2
    """
    if len(nu) > len(mu):
        return 0
    if not mu:
        return 1
    if len(mu) == 1:
        return int(nu == mu)
    return sum(kostka(smaller, mu[1:]) for smaller in _remove_horizontal_strip(nu, mu[0]))


def _remove_horizontal_strip(nu: tuple[int, ...], size: int) -> Iterator[tuple[int, ...]]:
    below = (*nu[1:], 0)
    slack = [part - low for part, low in zip(nu, below, strict=True)]
    for removed in product(*(range(min(s, size) + 1) for s in slack[:-1])):
        last = size - sum(removed)
        if 0 <= last <= slack[-1]:
            smaller = tuple(part - gone for part, gone in zip(nu, (*removed, last), strict=True))
            yield tuple(part for part in smaller if part)
