"""Where the methods and densities behind a rule were published, as plain citations for print.

All references are from memory, with high confidence.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import NamedTuple

from simplexcub.rule import Rule


class Source(NamedTuple):
    """A publication: the short form that stands in the text, and the whole citation."""

    short: str
    full: str


GAUSS = Source(
    "Golub & Welsch 1969",
    "G. H. Golub, J. H. Welsch, Calculation of Gauss quadrature rules, Math. Comp. 23 (1969) 221–230.",
)
STROUD = Source("Stroud 1971", "A. H. Stroud, Approximate Calculation of Multiple Integrals, Prentice-Hall (1971).")
MANTEL = Source(
    "Mantel & Rabinowitz 1977",
    "F. Mantel, P. Rabinowitz, The application of integer programming to the computation of fully symmetric "
    "integration formulas in two and three dimensions, SIAM J. Numer. Anal. 14 (1977) 391–425.",
)
MARQUARDT = Source(
    "Marquardt 1963",
    "D. W. Marquardt, An algorithm for least-squares estimation of nonlinear parameters, SIAM J. Appl. Math. 11 (1963) "
    "431–441.",
)
ELIMINATION = Source(
    "Xiao & Gimbutas 2010",
    "H. Xiao, Z. Gimbutas, A numerical algorithm for the construction of efficient quadrature rules in two and higher "
    "dimensions, Comput. Math. Appl. 59 (2010) 663–676.",
)
KRAWCZYK = Source(
    "Krawczyk 1969",
    "R. Krawczyk, Newton-Algorithmen zur Bestimmung von Nullstellen mit Fehlerschranken, Computing 4 (1969) 187–201.",
)
KANTOROVICH = Source(
    "Kantorovich & Akilov 1982", "L. V. Kantorovich, G. P. Akilov, Functional Analysis, 2nd ed., Pergamon (1982)."
)
MOELLER = Source(
    "Möller 1979",
    "H. M. Möller, Lower bounds for the number of nodes in cubature formulae, in: Numerische Integration, ISNM 45, "
    "Birkhäuser (1979) 221–230.",
)
INDUCED = Source(
    "Życzkowski & Sommers 2001",
    "K. Życzkowski, H.-J. Sommers, Induced measures in the space of mixed quantum states, J. Phys. A 34 (2001) "
    "7111–7125.",
)
BURES = Source(
    "Sommers & Życzkowski 2003",
    "H.-J. Sommers, K. Życzkowski, Bures volume of the set of mixed quantum states, J. Phys. A 36 (2003) 10083–10100.",
)
_BY_METHOD = {
    "Gauss": (GAUSS,),
    "conical product": (STROUD,),
    "orbit search": (MARQUARDT, MANTEL, ELIMINATION),
}
_BY_FAMILY = {"hilbert-schmidt": (INDUCED,), "induced": (INDUCED,), "bures": (BURES,)}


def sources(rule: Rule) -> dict[str, tuple[Source, ...]]:
    """Label of a fact of `describe.facts` → the publications that stand behind it.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> from simplexcub.table.shipped import load
    >>> [source.short for source in sources(load(flat(2), degree=3))["method"]]
    ['Golub & Welsch 1969']
    """
    found: dict[str, tuple[Source, ...]] = {
        "density": _BY_FAMILY.get(rule.measure.family, ()),
        "method": next((s for name, s in _BY_METHOD.items() if rule.provenance.method.startswith(name)), ()),
    }
    check = rule.verification
    if check is not None:
        if rule.measure.N > 2 and rule.degree % 2 and rule.space == "all":
            found["lower bound"] = (MOELLER,)
        proof = check.proof or {}
        if proof.get("holds") is True and str(proof.get("method", "")).startswith("Newton"):
            found["proof"] = (KRAWCZYK, KANTOROVICH)
    return {label: these for label, these in found.items() if these}


def numbered(rules: Iterable[Rule]) -> dict[Source, int]:
    """All sources behind some rules, sorted by author and numbered from 1."""
    found = {source for rule in rules for these in sources(rule).values() for source in these}
    return {source: k for k, source in enumerate(sorted(found, key=lambda s: (s.short, s.full)), 1)}
