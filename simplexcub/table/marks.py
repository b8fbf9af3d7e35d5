"""Fewest nodes in the literature for the flat measure: the marks that a rule is held against.

``published.csv`` lists positive rules with all nodes on the simplex, for node sets invariant under all permutations
(``full``) and for any (``any``), each with its source and how sure the figure is.
"""

from __future__ import annotations

import csv
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path

_FILE = Path(__file__).with_name("published.csv")


@dataclass(frozen=True)
class Mark:
    """A published count.

    Attributes
    ----------
    nodes : int
    symmetry : {"full", "any"}
        What was asked of the node set.
    source, confidence : str
        Where the count was published, and how sure the figure is.
    """

    nodes: int
    symmetry: str
    source: str
    confidence: str


def published(family: str, N: int, degree: int, symmetry: str) -> Mark | None:
    """The fewest nodes published for rules of this kind, or None where there are none.

    Parameters
    ----------
    family : str
        Of measures; only ``flat`` has published counts.
    N, degree : int
    symmetry : str
        Of the rule to be compared: ``full``, or another name, for which rules without full symmetry count too.

    Examples
    --------
    >>> published("flat", 4, 4, "full").nodes, published("flat", 4, 4, "none").nodes
    (14, 11)
    """
    marks = _marks() if family == "flat" else {}
    kinds = ("full",) if symmetry == "full" else ("any", "full")
    found = [marks[N, degree, kind] for kind in kinds if (N, degree, kind) in marks]
    return min(found, key=lambda mark: mark.nodes, default=None)


@lru_cache(maxsize=1)
def _marks() -> dict[tuple[int, int, str], Mark]:
    with _FILE.open(encoding="utf-8", newline="") as file:
        return {
            (int(row["N"]), int(row["degree"]), row["symmetry"]): Mark(
                int(row["nodes"]), row["symmetry"], row["source"], row["confidence"]
            )
            for row in csv.DictReader(file)
        }
