r"""Numbers and words as LaTeX sets them, and how wide they come out in Computer Modern.

Widths decide the layout of a table before LaTeX sees it: whether an entry fits into one line, and after how many digits
a number must be broken. They are those of the fonts' metric files for digits, and upper bounds for words.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from simplexcub.table.describe import escape

BLOCK = 5
_SPLIT = re.compile(r"λ([0-9]+|N)\b|\b([NK]) = ([0-9]+)\b")


@dataclass(frozen=True)
class Size:
    """A type size: the command that selects it, and widths in points of a digit, a point, a thin space and a letter."""

    command: str
    digit: float
    point: float
    thin: float
    letter: float

    def number(self, decimal: str) -> float:
        """Width of a decimal on one line."""
        whole, point, places = decimal.partition(".")
        width = len(whole) * self.digit + (3 * self.digit if whole.startswith("-") else 0)
        if not point:
            return width
        return width + self.point + len(places) * self.digit + (len(places) - 1) // BLOCK * self.thin

    def words(self, text: str) -> float:
        """Upper bound for the width of a few words, or of a pattern with thin spaces."""
        blanks = text.count(" ")
        return (len(text) - blanks + 0.4 * blanks) * self.letter

    def digits_within(self, width: float) -> int:
        """Places after the point that fit into `width`, in whole blocks; at least one block."""
        first = width - self.digit - self.point - 3 * self.digit
        return max(1, int((first + self.thin) // (BLOCK * self.digit + self.thin))) * BLOCK


SIZES = (Size(r"\small", 4.63, 2.57, 1.55, 5.1), Size(r"\footnotesize", 4.26, 2.37, 1.43, 4.7))


def prose(text: str) -> str:
    """Plain text as LaTeX, with λ1 and N = 3 as formulas."""
    parts, end = [], 0
    for match in _SPLIT.finditer(text):
        parts.append(escape(text[end : match.start()]))
        name = rf"\lambda_{{{match[1]}}}" if match[1] else f"{match[2]}={match[3]}"
        parts.append(f"${name}$")
        end = match.end()
    return "".join([*parts, escape(text[end:])])


def number(decimal: str, places_per_line: int) -> list[str]:
    """A decimal as one or more lines, with a thin space after every five places; later lines start under the first."""
    whole, point, places = decimal.partition(".")
    if not point or not places.isdigit():
        return [rf"$\mathtt{{{decimal}}}$" if not decimal.lstrip("-").isdigit() else f"${decimal}$"]
    lines = []
    for start in range(0, len(places), places_per_line):
        part = places[start : start + places_per_line]
        blocks = r"\,".join(part[i : i + BLOCK] for i in range(0, len(part), BLOCK))
        lines.append(f"${blocks}$" if start else f"${whole}.{blocks}$")
    return [lines[0], *(rf"\phantom{{${whole}.$}}{line}" for line in lines[1:])]


def label(name: str) -> str:
    """The name of a column: λ3, a, v12, w."""
    if name.startswith("λ"):
        return rf"$\lambda_{{{name[1:]}}}$"
    return f"${name[0]}_{{{name[1:]}}}$" if name[1:] else f"${name}$"


def pattern(text: str) -> str:
    """A multiplicity pattern such as ``a b b``, ``a×1 b×15`` or ``a … p, all different``."""
    if "…" in text:
        formula, _, words = text.partition(", ")
        first, last = (re.sub("^([a-z])([0-9]+)$", r"\1_{\2}", name) for name in formula.split(" … "))
        return rf"${first},\dots,{last}$, {words}"
    words = re.sub(r"×([0-9]+)", r"{\\times}\1", re.sub(r"([a-z])([0-9]+)(?=×| |$)", r"\1_{\2}", text))
    spaced = words.replace(" ", r"\,")
    return f"${spaced}$"
