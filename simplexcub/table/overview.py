"""The shipped tables in one list: as text for a screen, as Markdown, or as LaTeX for a paper."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from difflib import get_close_matches
from types import MappingProxyType

from simplexcub.errors import InputError
from simplexcub.rule import Rule
from simplexcub.table import tex
from simplexcub.table.as_json import parse
from simplexcub.table.describe import efficiency
from simplexcub.table.files import read_text
from simplexcub.table.kind import special
from simplexcub.table.marks import published
from simplexcub.table.shipped import Shipped, catalogue, folder

HEAD = (
    *("measure", "N", "space", "symmetry", "degree", "nodes", "bound", "efficiency", "published", "digits", "proven"),
    *("special", "name"),
)
_NUMBERS = frozenset({"N", "degree", "nodes", "bound", "efficiency", "published", "digits"})
_GAP = "  "
_NONE = "–"
_SPECIAL = "special"
_WRAPPED = r"p{44pt}"


def overview(lines: Sequence[Shipped], to: str = "text") -> str:
    """A table of the shipped tables.

    `published` is the fewest nodes in the literature, for node sets of the same symmetry or any; `bound` a number of
    nodes that no rule of the degree can do without, `efficiency` is bound / nodes.

    Parameters
    ----------
    lines : sequence of Shipped
        From :func:`simplexcub.table.catalogue`.
    to : {"text", "markdown", "latex"}
        The LaTeX fragment needs booktabs and longtable, and leaves out the name. There is a column `special` where it
        has anything to say.

    Raises
    ------
    InputError
        An unknown form.
    """
    if to not in OVERVIEWS:
        raise InputError(f"an overview must be one of {', '.join(OVERVIEWS)}", to)
    rows = [HEAD, *(_cells(line) for line in lines)]
    told = [k for k, name in enumerate(HEAD) if name != _SPECIAL or any(row[k] for row in rows[1:])]
    return OVERVIEWS[to]([tuple(row[k] for k in told) for row in rows])


def by_name(name: str) -> Rule:
    """The shipped table called such as ``flat/N3/all-full-t05-7``; ``tables/`` and ``.json`` may stand around it.

    Raises
    ------
    InputError
        No such table; the message has the nearest name.

    Examples
    --------
    >>> by_name("flat/N2/all-full-t03-2")
    <Rule flat(N=2), all, degree 3, 2 nodes, 50 digits>
    """
    wanted = name.removeprefix("tables/").removesuffix(".json")
    names = [name_of(line) for line in catalogue()]
    if wanted not in names:
        near = get_close_matches(wanted, names, n=1, cutoff=0.5)
        remedy = " ".join([*(f"Nearest: {n}." for n in near), "See 'simplexcub tables' for all."])
        raise InputError("the name must be that of a shipped table", repr(name), remedy)
    return parse(read_text(folder() / f"{wanted}.json"), wanted)


def name_of(line: Shipped) -> str:
    """What `by_name` calls a table.

    Examples
    --------
    >>> name_of(catalogue("flat", N=2)[0])
    'flat/N2/all-full-t01-1'
    """
    return line.file.removesuffix(".json")


def _cells(line: Shipped) -> tuple[str, ...]:
    shown = {name: value for name, value in line.measure.items() if name not in ("family", "N")}
    if line.family == "hilbert-schmidt":
        shown.pop("K", None)
    parameters = [f"{name} = {' '.join(x) if isinstance(x, list) else x}" for name, x in shown.items()]
    mark = (
        published(line.family, line.N, line.degree, line.symmetry)
        if line.space == "all" and not line.kind.told
        else None
    )
    return (
        ", ".join([line.family, *parameters]),
        str(line.N),
        line.space,
        line.symmetry,
        str(line.degree),
        str(line.nodes),
        str(line.bound),
        efficiency(line.bound, line.nodes),
        _NONE if mark is None else f"{mark.nodes} {mark.symmetry}",
        str(line.digits),
        "yes" if line.proven else "no",
        special(line.kind, line.embedded),
        name_of(line),
    )


def _text(table: Sequence[tuple[str, ...]]) -> str:
    widths = [max(len(row[k]) for row in table) for k in range(len(table[0]))]
    lines = []
    for row in table:
        cells = zip(table[0], row, widths, strict=True)
        lines.append(_GAP.join(cell.rjust(w) if name in _NUMBERS else cell.ljust(w) for name, cell, w in cells))
    return "".join(f"{line.rstrip()}\n" for line in lines)


def _markdown(table: Sequence[tuple[str, ...]]) -> str:
    head, *rows = table
    rule = tuple("---:" if name in _NUMBERS else ":---" for name in head)
    return "".join(f"| {' | '.join(row)} |\n" for row in (head, rule, *rows))


def _latex(table: Sequence[tuple[str, ...]]) -> str:
    digits = {row[table[0].index("digits")] for row in table[1:]}
    same = f" All are printed to {digits.pop()} digits." if len(digits) == 1 else ""
    left_out = {"name", *(["digits"] if same else [])}
    names, *rows = [tuple(c for c, name in zip(row, table[0], strict=True) if name not in left_out) for row in table]
    head = " & ".join("eff." if name == "efficiency" else name for name in names) + r" \tabularnewline"
    types = "".join("r" if name in _NUMBERS else _WRAPPED if name == _SPECIAL else "l" for name in names)
    lines = [
        r"% In the preamble: \usepackage{booktabs,longtable}",
        r"\begingroup\scriptsize\setlength{\tabcolsep}{1.7pt}\setlength{\LTcapwidth}{\textwidth}",
        rf"\begin{{longtable}}{{@{{}}{types}@{{}}}}",
        rf"\caption{{{len(rows)} rules. No rule of the degree has fewer nodes than the bound; eff.\ is bound over "
        rf"nodes; published is the fewest nodes in the literature, for full symmetry or any.{same}}}\\",
        *(r"\toprule", head, r"\midrule\endfirsthead"),
        *(r"\toprule", head, r"\midrule\endhead"),
        r"\bottomrule\endlastfoot",
        *(" & ".join(tex.prose(cell) for cell in row) + r" \tabularnewline" for row in rows),
        r"\end{longtable}",
        r"\endgroup",
    ]
    return "".join(f"{line}\n" for line in lines)


OVERVIEWS: Mapping[str, Callable[[Sequence[tuple[str, ...]]], str]] = MappingProxyType(
    {"text": _text, "markdown": _markdown, "latex": _latex}
)
