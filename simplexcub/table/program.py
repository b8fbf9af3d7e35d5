"""What the formats for compilers share: a name that a program can use, and the header comment."""

from __future__ import annotations

import re
import textwrap

from simplexcub.rule import Rule
from simplexcub.table.describe import facts, heading

_WIDTH = 96
_LONGEST_NAME = 40
_RAISED = "⁰¹²³⁴⁵⁶⁷⁸⁹"
_SPELLED = {
    "λ": "x",
    "≤": "<=",
    "≥": ">=",
    "−": "-",
    "–": "-",
    "·": "*",
    "×": "x",
    "…": "...",
    "Γ": "Gamma",
    "α": "alpha",
    "Π": "prod",
    "Σ": "sum",
    "β": "beta",
    "ö": "oe",
}


def name(rule: Rule) -> str:
    """A name for the rule in C and Fortran: the family, N and K, the degree and the number of nodes.

    Examples
    --------
    >>> from simplexcub.measures import hilbert_schmidt
    >>> from simplexcub.table.shipped import load
    >>> name(load(hilbert_schmidt(3), degree=7))
    'hilbert_schmidt_n3_t7_m13'
    """
    family = re.sub(r"[^a-z0-9]+", "_", rule.measure.family.lower()).strip("_")[:_LONGEST_NAME]
    record = rule.measure.parameters()
    k = f"_k{record['K']}" if rule.measure.family == "induced" else ""
    space = "" if rule.space == "all" else f"_{rule.space}"
    return f"{family}_n{rule.measure.N}{k}{space}_t{rule.degree}_m{len(rule)}"


def header(rule: Rule) -> list[str]:
    """The facts about a rule as lines of plain ASCII, for a comment; none contains a comment's end or a backslash."""
    described = facts(rule)
    width = max(len(fact.label) for fact in described) + 2
    lines = [_ascii(heading(rule)) + ".", ""]
    for fact in described:
        text = f"{fact.label:<{width}}{_ascii(fact.text)}"
        lines += textwrap.wrap(text, _WIDTH, subsequent_indent=" " * width, break_long_words=True)
    return [*lines, "", "Nodes are points of the simplex, so every row sums to 1; weights sum to 1."]


def _ascii(text: str) -> str:
    text = re.sub(f"[{_RAISED}]+", lambda m: "^" + "".join(str(_RAISED.index(c)) for c in m[0]), text)
    spelled = "".join(_SPELLED.get(c, c if " " <= c <= "~" else "?") for c in text)
    return spelled.replace("\\", "/").replace("*/", "* /").replace("/*", "/ *").replace("??", "? ?")


def real(decimal: str) -> str:
    """A decimal as a floating-point literal: integers get their point."""
    return decimal if re.search(r"[.eE]", decimal) else f"{decimal}.0"
