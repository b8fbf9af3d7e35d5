"""The measure on the command line, the same for every command."""

from __future__ import annotations

import argparse

from simplexcub.cli.options import listed, whole
from simplexcub.errors import InputError
from simplexcub.measures import FAMILIES, Measure, from_parameters

_PARAMETERS = ("N", "K", "alpha", "exponent", "beta", "polynomial")


def add_measure(
    parser: argparse.ArgumentParser, *, option: bool = False, use: str = "check against this measure"
) -> None:
    """The measure and its parameters: a positional MEASURE, or ``--measure`` where a file may name it already.

    `use` says in the help what ``--measure`` does there.
    """
    names = ", ".join(FAMILIES)
    if option:
        parser.add_argument("--measure", metavar="MEASURE", help=f"{use}: {names}")
    else:
        parser.add_argument("measure", metavar="MEASURE", help=f"one of {names}")
    parser.add_argument("-N", type=whole, metavar="N", help="number of outcomes or eigenvalues")
    parser.add_argument("-K", type=whole, metavar="K", help="size of the environment (induced and the like)")
    parser.add_argument("--alpha", type=listed, metavar="A,...", help="exact parameters such as 1/2,1,1 (dirichlet)")
    parser.add_argument("--exponent", metavar="C", help="exponent of each eigenvalue, such as -1/3 (bures-hall, beta)")
    parser.add_argument("--beta", metavar="B", help="exponent of the differences (beta)")
    parser.add_argument("--polynomial", metavar="P", help="such as '(x1 - x2)^2 * x3', times --alpha (polynomial)")


def measure_of(args: argparse.Namespace) -> Measure:
    """The measure that the options of `add_measure` describe."""
    return from_parameters({"family": args.measure, **{name: getattr(args, name) for name in _PARAMETERS}})


def stated_measure(args: argparse.Namespace) -> Measure | None:
    """The measure given by ``--measure``, or None where the file is to name it.

    Raises
    ------
    InputError
        Parameters without ``--measure``.
    """
    if args.measure is None:
        for name in _PARAMETERS:
            if getattr(args, name) is not None:
                option = f"-{name}" if len(name) == 1 else f"--{name}"
                remedy = "Or let the file name it all."
                raise InputError("parameters must come with --measure", f"{option} alone", remedy)
        return None
    return measure_of(args)
