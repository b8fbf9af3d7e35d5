"""The factors of a density as plain text and as LaTeX."""

from __future__ import annotations

from fractions import Fraction
from itertools import combinations

WRITTEN_OUT = 6  # larger N write the products with an index


_SUPERSCRIPT = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")


def raised(c: Fraction) -> str:
    """An exponent in plain text: none for 1, a superscript for a whole one, else ^ and a bracket.

    Examples
    --------
    >>> raised(Fraction(1)), raised(Fraction(12)), raised(Fraction(-1, 2))
    ('', '¹²', '^(-1/2)')
    """
    if c == 1:
        return ""
    return str(c).translate(_SUPERSCRIPT) if c.denominator == 1 and c > 0 else f"^({c})"


def power_product(c: Fraction, n: int) -> tuple[str, str]:
    """Π λ_i^c, followed by a blank in the plain text; both empty for c = 0."""
    if not c:
        return "", ""
    shown = raised(c)
    tex = "" if c == 1 else f"^{{{c}}}"
    if n > WRITTEN_OUT:
        return f"Π_i λi{shown} ", rf"\prod_i\lambda_i{tex}"
    return " ".join(f"λ{i}{shown}" for i in range(1, n + 1)) + " ", rf"\prod_i\lambda_i{tex}"


def pair_product(plain: str, tex: str, n: int) -> tuple[str, str]:
    """Π_{i<j} of a factor; `plain` has the places {i} and {j}, `tex` the indices i and j."""
    product = rf"\prod_{{i<j}}{tex}"
    if n > WRITTEN_OUT:
        return "Π_(i<j) " + plain.format(i="i", j="j"), product
    return " ".join(plain.format(i=i, j=j) for i, j in combinations(range(1, n + 1), 2)), product
