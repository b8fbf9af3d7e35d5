"""A rule from a file, whoever wrote it."""

from __future__ import annotations

import os

from simplexcub.errors import InputError
from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.table import as_csv, as_json, as_text, foreign, from_text
from simplexcub.table.files import read_text


def read(path: str | os.PathLike[str], *, measure: Measure | None = None) -> Rule:
    """Read a table in JSON, CSV or text; the content decides which, not the name.

    Parameters
    ----------
    path : path-like
    measure : Measure, optional
        What the rule is for, where the file does not say: rows of N coordinates and a weight, or a JSON object with
        ``nodes`` and ``weights``. Such a rule has degree 0, since nothing is claimed for it.

    Returns
    -------
    Rule
        With the digits of the file.

    Raises
    ------
    InputError
        The file cannot be opened, or names another measure than `measure`.
    TableError
        It is not a table: damaged, cut short, changed, off the simplex.
    """
    where = os.fspath(path)
    return parse(read_text(where), where, measure)


def parse(text: str, where: str, measure: Measure | None = None) -> Rule:
    """`read` for a text at hand; `where` names it in messages."""
    start = text.lstrip()
    if start.startswith(("{", "[")):
        rule = as_json.parse(text, where, measure)
    elif start.startswith(as_csv.MARK):
        rule = as_csv.parse(start, where)
    elif start.startswith(as_text.MARK):
        rule = from_text.parse(start, where)
    else:
        rule = foreign.parse(text, where, measure)
    if measure is not None and rule.measure != measure:
        remedy = "Leave the measure out, or verify the bare nodes and weights against it."
        raise InputError(f"{where}: measure must be the table's own, {rule.measure}", measure, remedy)
    return rule
