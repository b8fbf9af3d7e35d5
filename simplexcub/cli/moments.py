"""`simplexcub moments`: the exact mean of a monomial."""

from __future__ import annotations

import argparse

from simplexcub.cli.measure import add_measure, measure_of
from simplexcub.cli.options import whole, whole_numbers
from simplexcub.cli.output import exact_text
from simplexcub.errors import InputError

EXAMPLE = "simplexcub moments hilbert-schmidt -N 3 --exponents 2,1,0"
MOST_DIGITS = 10_000


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    add_measure(parser)
    parser.add_argument(
        "--exponents", type=whole_numbers, required=True, metavar="A,...", help="one exponent per component"
    )
    parser.add_argument(
        "--digits", type=whole, default=50, metavar="D", help="significant digits of the decimal (default 50)"
    )


def run(args: argparse.Namespace) -> int:
    """Print the mean as a fraction and a decimal."""
    measure = measure_of(args)
    if not 1 <= args.digits <= MOST_DIGITS:
        raise InputError(f"digits must be between 1 and {MOST_DIGITS}", args.digits)
    value = measure.moment(args.exponents)
    print(f"E[{_monomial(args.exponents)}] = {exact_text(value, args.digits)}")
    return 0


def _monomial(exponents: tuple[int, ...]) -> str:
    factors = (f"λ{i}" + (f"^{a}" if a > 1 else "") for i, a in enumerate(exponents, 1) if a)
    return " ".join(factors) or "1"
