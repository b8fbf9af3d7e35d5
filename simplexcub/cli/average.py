"""`simplexcub average`: the mean of a named function of the spectrum, exact or with its estimated error."""

from __future__ import annotations

import argparse

from simplexcub.average.functions import NAMES, spectral_function
from simplexcub.average.mean import average
from simplexcub.cli.measure import add_measure, measure_of
from simplexcub.cli.options import positive
from simplexcub.cli.output import ProgressLine, exact_text
from simplexcub.cli.speech import complain

EXAMPLE = "simplexcub average hilbert-schmidt -N 3 von-neumann --tol 1e-4"
DIGITS = 50


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    add_measure(parser)
    parser.add_argument(
        "function", metavar="FUNCTION", help=f"one of {', '.join(NAMES)}; Q is an order such as 2, 1/2 or 0.5"
    )
    parser.add_argument(
        "--tol", type=positive, default=1e-6, metavar="E", help="absolute error to aim at (default 1e-6)"
    )


def run(args: argparse.Namespace) -> int:
    """Print the mean and what is known about its error."""
    function = spectral_function(args.function)
    measure = measure_of(args)
    with ProgressLine() as show:
        mean = average(function, measure, tol=args.tol, progress=show)
    if mean.exact is not None:
        print(f"{exact_text(mean.exact, DIGITS)}\nexact")
        return 0
    print(f"{mean.value:.15g}")
    print(f"estimated error {mean.error:.1e}")
    print(f"{mean.evaluations} evaluations: {mean.how}")
    if mean.error > args.tol:
        complain(f"tolerance {args.tol:g} was not met: the estimated error is {mean.error:.1e}")
        return 1
    return 0
