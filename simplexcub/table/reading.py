"""A rule from a file, whoever wrote it."""

from __future__ import annotations

import os
from dataclasses import replace

from simplexcub.errors import InputError, TableError
from simplexcub.measures import Measure, flat
from simplexcub.rule import Rule
from simplexcub.table import as_csv, as_json, as_text, foreign, from_text
from simplexcub.table.files import read_text
from simplexcub.table.record import check_rule


def read(path: str | os.PathLike[str], *, measure: Measure | None = None, damaged: bool = False) -> Rule:
    """Read a table in JSON, CSV or text; the content decides which, not the name.

    Parameters
    ----------
    path : path-like
    measure : Measure, optional
        What the rule is for, where the file does not say: rows of N coordinates and a weight, or a JSON object with
        ``nodes`` and ``weights``. Such a rule has degree 0, since nothing is claimed for it.
    damaged : bool, optional
        Read on where the checksum is wrong, nodes or weights do not sum to 1, or orbits are not those of the nodes, so
        that the numbers can be mended. The rule then has no orbits and no verification.

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
    return parse(read_text(where), where, measure, damaged=damaged)


def read_bare(path: str | os.PathLike[str], *, N: int | None = None) -> Rule:
    """The nodes and weights of a table with every claim put aside, to be held against one measure after another.

    Parameters
    ----------
    path : path-like
    N : int, optional
        Number of components, where the file does not name a measure; by default it is taken from the rows.

    Returns
    -------
    Rule
        Of degree 0, for the flat measure.

    Raises
    ------
    InputError, TableError
        As for :func:`read`.
    """
    where = os.fspath(path)
    text = read_text(where)
    measure = None if N is None else flat(N)
    start = text.lstrip()
    if start.startswith(("{", "[")) or start.startswith((as_csv.MARK, as_text.MARK)):
        try:
            rule = parse(text, where)
        except TableError as error:
            if measure is None or "name its measure" not in error.rule:
                raise
            rule = parse(text, where, measure)
    else:
        rule = foreign.parse(text, where, measure, guess=True)
        check_rule(rule, where)
    if N is not None and rule.measure.N != N:
        raise InputError(f"{where}: N must be that of the table, {rule.measure.N}", N)
    return replace(
        rule,
        measure=flat(rule.measure.N),
        degree=0,
        symmetry="full" if rule.space == "symmetric" else "none",
        equal_weights=False,
        orbits=(),
        also=(),
        integer_weights=(),
        embedded=None,
        verification=None,
    )


def parse(text: str, where: str, measure: Measure | None = None, *, damaged: bool = False) -> Rule:
    """`read` for a text at hand; `where` names it in messages."""
    start = text.lstrip()
    if start.startswith(("{", "[")):
        rule = as_json.parse(text, where, measure, damaged=damaged)
    elif start.startswith(as_csv.MARK):
        rule = as_csv.parse(start, where)
    elif start.startswith(as_text.MARK):
        rule = from_text.parse(start, where)
    else:
        rule = foreign.parse(text, where, measure)
    if measure is not None and rule.measure != measure:
        remedy = "Leave the measure out, or verify the bare nodes and weights against it."
        raise InputError(f"{where}: measure must be the table's own, {rule.measure}", measure, remedy)
    if damaged:
        return replace(rule, orbits=(), verification=None)
    check_rule(rule, where)
    return rule
