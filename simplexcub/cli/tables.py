"""`simplexcub tables`: the rules that come with the package."""

from __future__ import annotations

import argparse

from simplexcub.cli.options import listed, whole
from simplexcub.entropic import canonical
from simplexcub.errors import NothingFound
from simplexcub.measures import FAMILIES
from simplexcub.table import Shipped, catalogue, efficiency, published

EXAMPLE = "simplexcub tables hilbert-schmidt -N 3"
_HEAD = ("measure", "space", "degree", "nodes", "bound", "efficiency", "published", "symmetry", "digits")
_NUMBERS = _HEAD[2:7]
_SPECIAL = "special"
_GAP = "  "


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("measure", nargs="?", metavar="MEASURE", help=f"only this one of {', '.join(FAMILIES)}")
    parser.add_argument("--equal-weights", action="store_true", help="only rules of equal weights")
    parser.add_argument("--also", type=listed, default=[], metavar="NAMES", help="only rules exact for these, too")
    parser.add_argument("--embedded", action="store_true", help="only rules with embedded weights")
    parser.add_argument("-N", type=whole, metavar="N", help="only this number of outcomes or eigenvalues")


def run(args: argparse.Namespace) -> int:
    """List the rules beside the least number of nodes that any rule of the degree has, and the fewest published."""
    found = catalogue(args.measure, N=args.N)
    if args.equal_weights or args.also or args.embedded:
        also = tuple(canonical(name) for name in args.also)
        asked = {"equal_weights": args.equal_weights, "also": also, "embedded": args.embedded}
        found = tuple(item for item in found if item.kind.serves(**asked))
    if not found:
        wanted = " ".join([args.measure or "", "" if args.N is None else f"N = {args.N}"]).strip()
        raise NothingFound("shipped table", f"none for {wanted}", "See 'simplexcub tables' for all, or solve for one.")
    head = (*_HEAD, *([_SPECIAL] if any(item.kind.told for item in found) else []))
    rows = [head, *(_row(item)[: len(head)] for item in found)]
    widths = [max(len(row[k]) for row in rows) for k in range(len(head))]
    for row in rows:
        cells = zip(head, row, widths, strict=True)
        print(_GAP.join(cell.rjust(w) if name in _NUMBERS else cell.ljust(w) for name, cell, w in cells).rstrip())
    return 0


def _row(item: Shipped) -> tuple[str, ...]:
    parameters = ", ".join(
        f"{name} = {','.join(value) if isinstance(value, list) else value}"
        for name, value in item.measure.items()
        if name != "family" and not (item.family == "hilbert-schmidt" and name == "K")
    )
    plain = item.space == "all" and not item.kind.told
    mark = published(item.family, item.N, item.degree, item.symmetry) if plain else None
    return (
        f"{item.family}, {parameters}",
        item.space,
        str(item.degree),
        str(item.nodes),
        str(item.bound),
        efficiency(item.bound, item.nodes),
        "–" if mark is None else f"{mark.nodes} {mark.symmetry}",
        item.symmetry,
        str(item.digits),
        _special(item),
    )


def _special(item: Shipped) -> str:
    told = item.kind.told.removeprefix(", ")
    return f"{told} to degree {item.embedded}" if item.embedded is not None else told
