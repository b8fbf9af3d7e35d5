"""`simplexcub draw`: the picture of a rule, or of how the shipped rules converge."""

from __future__ import annotations

import argparse
from pathlib import Path

from simplexcub.average.functions import NAMES, spectral_function
from simplexcub.cli.measure import add_measure, measure_of, stated_measure
from simplexcub.cli.output import require_writable
from simplexcub.errors import InputError
from simplexcub.picture import draw, draw_convergence, kind_of
from simplexcub.picture.errors import measure_errors
from simplexcub.table import read
from simplexcub.table.describe import measure_name
from simplexcub.table.selection import located

EXAMPLE = "simplexcub draw tables/hilbert-schmidt/N3/all-full-t07-15.json -o nodes.svg"

_TITLES = {"von-neumann": "von Neumann entropy"}  # of functions that are not called in a title as on the command line


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("file", nargs="?", type=Path, metavar="FILE", help="a table, as JSON, CSV or text")
    parser.add_argument("-o", "--output", type=Path, required=True, metavar="PICTURE", help="svg, png or pdf")
    names = ", ".join(NAMES)
    parser.add_argument(
        "--convergence",
        metavar="FUNCTION",
        help=f"draw the errors of the shipped rules for --measure on one of {names}",
    )
    add_measure(parser, option=True, use="measure of --convergence, or of a table that names none")
    more = "with --convergence:\n  simplexcub draw --convergence von-neumann --measure flat -N 3 -o errors.svg"
    parser.epilog = f"{more}\n\n{parser.epilog}"


def run(args: argparse.Namespace) -> int:
    """Draw, and for convergence print the numbers that are drawn."""
    kind_of(args.output)
    require_writable(args.output)
    if args.convergence is not None:
        return _convergence(args)
    if args.file is None:
        raise InputError("draw must have a table to draw", "none", "Or name a function: --convergence.")
    draw(read(located(args.file), measure=stated_measure(args)), args.output)
    return 0


def _convergence(args: argparse.Namespace) -> int:
    if args.file is not None:
        raise InputError("--convergence must come without a file", args.file, "The shipped rules are what is compared.")
    if args.measure is None:
        raise InputError("--convergence must come with --measure", "none", "Such as --measure flat -N 3.")
    f = spectral_function(args.convergence)
    measure = measure_of(args)
    found = measure_errors(f, measure)
    title = (
        f"{_TITLES.get(f.name, f.name)}, {measure_name(measure)}: error of the shipped rules against {found.against}"
    )
    draw_convergence(found.rules, title, args.output, spread=found.spread)
    print(f"{found.against}: {found.reference:.15g}\n{'degree':>6}  {'nodes':>5}  {'error':>7}")
    for line in found.rules:
        print(f"{line.degree:>6}  {line.nodes:>5}  {line.error:7.1e}")
    return 0
