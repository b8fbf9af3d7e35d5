"""`simplexcub tables`: what is shipped, and single tables out of it."""

from __future__ import annotations

import argparse

from simplexcub.cli.options import listed, whole
from simplexcub.entropic import canonical
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import FAMILIES
from simplexcub.table import catalogue, render
from simplexcub.table.overview import OVERVIEWS, by_name, overview

EXAMPLE = "simplexcub tables hilbert-schmidt -N 3"


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("measure", nargs="?", metavar="MEASURE", help=f"only this one of {', '.join(FAMILIES)}")
    parser.add_argument("--equal-weights", action="store_true", help="only rules of equal weights")
    parser.add_argument("--also", type=listed, default=[], metavar="NAMES", help="only rules exact for these, too")
    parser.add_argument("--embedded", action="store_true", help="only rules with embedded weights")
    parser.add_argument("-N", type=whole, metavar="N", help="only this number of outcomes or eigenvalues")
    parser.add_argument("--to", choices=tuple(OVERVIEWS), default="text", help="form of what is printed (default text)")
    parser.add_argument("--show", metavar="NAME", help="print one table, such as flat/N3/all-full-t05-7")


def run(args: argparse.Namespace) -> int:
    """List the rules beside the least number of nodes that any rule of the degree has, and the fewest published."""
    if args.show is not None:
        if args.measure is not None or args.N is not None:
            raise InputError("--show must come without MEASURE and -N", "both", "The name says it all.")
        print(render(by_name(args.show), args.to), end="")
        return 0
    found = catalogue(args.measure, N=args.N)
    if args.equal_weights or args.also or args.embedded:
        also = tuple(canonical(name) for name in args.also)
        asked = {"equal_weights": args.equal_weights, "also": also, "embedded": args.embedded}
        found = tuple(item for item in found if item.kind.serves(**asked))
    if not found:
        wanted = " ".join([args.measure or "", "" if args.N is None else f"N = {args.N}"]).strip()
        raise NothingFound("shipped table", f"none for {wanted}", "See 'simplexcub tables' for all, or solve for one.")
    print(overview(found, args.to), end="")
    return 0
