"""Tables of other makers: rows of coordinates and a weight, which name no measure and claim no degree.

Rows of N − 1 coordinates are completed by Σ λ_i = 1, and weights that sum to the simplex's volume 1/(N − 1)! are
multiplied by (N − 1)!; both are done exactly on the decimals, and the rule's provenance says so.
"""

from __future__ import annotations

import math
import os
import re
from collections.abc import Sequence
from decimal import Context, Decimal, Inexact

from simplexcub.decimals import most_digits
from simplexcub.errors import TableError
from simplexcub.measures import Measure, flat
from simplexcub.rule import Provenance, Rule
from simplexcub.table.sanity import LONGEST_NUMBER, check_number

_COMMENT = ("#", "%", "!", "//")
WITHIN = Decimal("1e-3")
# Wide enough for every number that is let in; a sum that did not fit would be refused, not rounded.
_CONTEXT = Context(prec=20_000, Emin=-99_999, Emax=99_999, traps=[Inexact])
_DIGITS_FIRST = re.compile("[+-]?[.]?[0-9]")


def parse(text: str, where: str, measure: Measure | None, *, guess: bool = False) -> Rule:
    """The rule in rows of numbers separated by commas, semicolons, tabs or spaces; one heading row is skipped.

    Parameters
    ----------
    text, where : str
        The text, and the name of its file for messages.
    measure : Measure or None
        What the rule is for; without it the number of coordinates would be anybody's guess.
    guess : bool, optional
        Take N from the rows, and the flat measure of N components, where no measure is given.

    Raises
    ------
    TableError
        No measure, no rows, or a row that is not N coordinates and a weight.
    """
    rows: list[list[str]] = []
    places: list[str] = []
    heading_seen = False
    for number, line in enumerate(text.split("\n"), 1):
        if not line.strip() or line.lstrip().startswith(_COMMENT):
            continue
        cells = split_row(line)
        if not rows and not heading_seen and not any(_DIGITS_FIRST.match(cell) for cell in cells):
            heading_seen = True
            continue
        rows.append(cells)
        places.append(f"line {number}")
    if guess and measure is None and rows:
        measure = flat(max(count_components(rows), 2))
    return foreign_rule(rows, places, where, measure)


def split_row(line: str) -> list[str]:
    """The cells of one row, whichever of ``,`` ``;`` tab or blank separates them."""
    for separator in (",", ";"):
        if separator in line:
            cells = [cell.strip().strip('"') for cell in line.split(separator)]
            return cells[:-1] if not cells[-1] else cells
    return line.split()


def foreign_rule(rows: Sequence[Sequence[str]], places: Sequence[str], where: str, measure: Measure | None) -> Rule:
    """A rule of degree 0, which claims nothing, from rows of N coordinates and a weight."""
    if not rows:
        raise TableError(f"{where} must hold rows of nodes and weights", "no rows")
    if measure is None:
        remedy = "Say which measure it is for (measure=..., or --measure and -N)."
        raise TableError(f"{where}: a table must name its measure", "rows of numbers only", remedy)
    for row, place in zip(rows, places, strict=True):
        if len(row) not in (measure.N, measure.N + 1) or len(row) != len(rows[0]):
            rule = f"{where}, {place}: a row must hold N = {measure.N} or N - 1 coordinates and a weight"
            raise TableError(rule, f"{len(row)} entries", "Check N.")
        for cell in row:
            check_number(cell, f"{where}, {place}: {_shortened(cell)}")
    digits = min(most_digits(cell for row in rows for cell in row), LONGEST_NUMBER)
    read = [f"read from {re.sub(r'[^ -~]', '?', os.path.basename(where))}"]
    nodes = [tuple(row[:-1]) for row in rows]
    if len(nodes[0]) < measure.N:
        nodes = [(*node, _rest(node)) for node in nodes]
        read.append(f"coordinate {measure.N} from the sum 1")
    weights = [row[-1] for row in rows]
    scale = math.factorial(measure.N - 1)
    total = sum(map(Decimal, weights), Decimal(0))
    if scale > 1 and abs(total * scale - 1) < WITHIN:
        weights = [format(_CONTEXT.multiply(Decimal(w), scale), "f") for w in weights]
        read.append(f"weights summed to the volume 1/{scale}")
    return Rule(
        measure,
        0,
        tuple(nodes),
        tuple(weights),
        Provenance("not stated", 0, "undated", ", ".join(read)),
        symmetry="none",
        digits=digits,
    )


def _rest(node: Sequence[str]) -> str:
    """1 less the coordinates that are given, exactly."""
    rest = Decimal(1)
    for cell in node:
        rest = _CONTEXT.subtract(rest, Decimal(cell))
    return format(rest, "f")


def count_components(rows: Sequence[Sequence[str]]) -> int:
    """N from the first row: all cells but the weight if these sum to 1, one more if not."""
    try:
        barycentric = abs(sum((Decimal(cell) for cell in rows[0][:-1]), Decimal(-1))) < WITHIN
    except ArithmeticError:  # no finite numbers, which are refused later with their line
        barycentric = True
    return len(rows[0]) - barycentric


def _shortened(cell: str) -> str:
    return cell if len(cell) <= 24 else f"{cell[:20]}…"
