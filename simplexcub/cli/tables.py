"""`simplexcub tables`: the rules that come with the package."""

from __future__ import annotations

import argparse

from simplexcub.cli.options import whole
from simplexcub.errors import NothingFound
from simplexcub.measures import FAMILIES
from simplexcub.table import Shipped, catalogue

EXAMPLE = "simplexcub tables hilbert-schmidt -N 3"
_HEAD = ("measure", "space", "degree", "nodes", "bound", "digits")


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("measure", nargs="?", metavar="MEASURE", help=f"only this one of {', '.join(FAMILIES)}")
    parser.add_argument("-N", type=whole, metavar="N", help="only this number of outcomes or eigenvalues")


def run(args: argparse.Namespace) -> int:
    """List measure, space, degree, nodes and the least number of nodes that any rule of the degree has."""
    found = catalogue(args.measure, N=args.N)
    if not found:
        wanted = " ".join([args.measure or "", "" if args.N is None else f"N = {args.N}"]).strip()
        raise NothingFound("shipped table", f"none for {wanted}", "See 'simplexcub tables' for all, or solve for one.")
    rows = [_HEAD, *(_row(item) for item in found)]
    measures, spaces = max(len(row[0]) for row in rows), max(len(row[1]) for row in rows)
    for measure, space, *numbers in rows:
        print(f"{measure:<{measures}}  {space:<{spaces}}" + "".join(f"{number:>8}" for number in numbers))
    return 0


def _row(item: Shipped) -> tuple[str, ...]:
    parameters = ", ".join(
        f"{name} = {','.join(value) if isinstance(value, list) else value}"
        for name, value in item.measure.items()
        if name != "family" and not (item.family == "hilbert-schmidt" and name == "K")
    )
    numbers = (item.degree, item.nodes, item.bound, item.digits)
    return (f"{item.family}, {parameters}", item.space, *map(str, numbers))
