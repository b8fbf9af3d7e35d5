"""Tables of other makers: rows of N coordinates and a weight, which name no measure and claim no degree."""

from __future__ import annotations

import os
import re
from collections.abc import Sequence

from simplexcub.decimals import most_digits
from simplexcub.errors import TableError
from simplexcub.measures import Measure
from simplexcub.rule import Provenance, Rule
from simplexcub.table.record import assemble
from simplexcub.table.sanity import LONGEST_NUMBER, check_number

_COMMENT = ("#", "%", "!", "//")
_DIGITS_FIRST = re.compile("[+-]?[.]?[0-9]")


def parse(text: str, where: str, measure: Measure | None) -> Rule:
    """The rule in rows of numbers separated by commas, semicolons, tabs or spaces; one heading row is skipped.

    Parameters
    ----------
    text, where : str
        The text, and the name of its file for messages.
    measure : Measure or None
        What the rule is for; without it the number of coordinates would be anybody's guess.

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
        if len(row) != measure.N + 1:
            rule = f"{where}, {place}: a row must hold N = {measure.N} coordinates and a weight"
            raise TableError(rule, f"{len(row)} entries", "Check N, or write coordinates barycentrically.")
        for cell in row:
            check_number(cell, f"{where}, {place}: {_shortened(cell)}")
    digits = min(most_digits(cell for row in rows for cell in row), LONGEST_NUMBER)
    return assemble(
        Rule(
            measure,
            0,
            tuple(tuple(row[:-1]) for row in rows),
            tuple(row[-1] for row in rows),
            Provenance("not stated", 0, "undated", f"read from {re.sub(r'[^ -~]', '?', os.path.basename(where))}"),
            symmetry="none",
            digits=digits,
        ),
        where,
    )


def _shortened(cell: str) -> str:
    return cell if len(cell) <= 24 else f"{cell[:20]}…"
