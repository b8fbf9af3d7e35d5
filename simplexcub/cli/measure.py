"""The measure on the command line, the same for every command."""

from __future__ import annotations

import argparse

from simplexcub.cli.options import listed, whole
from simplexcub.errors import InputError
from simplexcub.measures import FAMILIES, Measure, from_parameters


def add_measure(parser: argparse.ArgumentParser, *, option: bool = False) -> None:
    """The measure and its parameters: a positional MEASURE, or ``--measure`` where a file may name it already."""
    names = ", ".join(FAMILIES)
    if option:
        parser.add_argument("--measure", metavar="MEASURE", help=f"check against this measure: {names}")
    else:
        parser.add_argument("measure", metavar="MEASURE", help=f"one of {names}")
    parser.add_argument("-N", type=whole, metavar="N", help="number of outcomes or eigenvalues")
    parser.add_argument("-K", type=whole, metavar="K", help="size of the environment (induced)")
    parser.add_argument("--alpha", type=listed, metavar="A,...", help="exact parameters such as 1/2,1,1 (dirichlet)")


def measure_of(args: argparse.Namespace) -> Measure:
    """The measure that the options of `add_measure` describe."""
    return from_parameters({"family": args.measure, "N": args.N, "K": args.K, "alpha": args.alpha})


def stated_measure(args: argparse.Namespace) -> Measure | None:
    """The measure given by ``--measure``, or None where the file is to name it.

    Raises
    ------
    InputError
        Parameters without ``--measure``.
    """
    if args.measure is None:
        given = [name for name, value in (("-N", args.N), ("-K", args.K), ("--alpha", args.alpha)) if value is not None]
        if given:
            raise InputError("parameters must come with --measure", f"{given[0]} alone", "Or let the file name it all.")
        return None
    return measure_of(args)
