"""`simplexcub moments`: exact means of monomials, power sums, real powers and entropies, and tables of them."""

from __future__ import annotations

import argparse
from fractions import Fraction
from pathlib import Path

from mpmath import mp

from simplexcub.cli.measure import add_measure, measure_of
from simplexcub.cli.options import whole, whole_numbers
from simplexcub.cli.output import exact_text, require_writable
from simplexcub.decimals import to_decimal
from simplexcub.errors import InputError
from simplexcub.measures import Measure, ordered
from simplexcub.measures.formulas import log_formula, moment_formula, power_sum_formula, real_power_formula
from simplexcub.moments.digamma import DigammaSum
from simplexcub.table.files import write_atomically
from simplexcub.table.moment_table import FORMATS, format_of, moment_table, monomial, render_moments

EXAMPLE = "simplexcub moments hilbert-schmidt -N 3 --exponents 2,1,0"
MOST_DIGITS = 10_000
LONGEST_FORM = 4_000  # characters of a closed form; a longer one is given by its digits alone
SMALLEST_WRITTEN_OUT = 300  # zeros after the point; smaller values are written with a power of ten
_QUANTITIES = ("exponents", "power_sums", "power", "entropy", "log", "table")


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    add_measure(parser)
    parser.add_argument("--exponents", type=whole_numbers, metavar="A,...", help="of a monomial, one per component")
    parser.add_argument("--power-sums", type=whole_numbers, metavar="K,...", help="mean of Π p_k, p_k = Σ λ^k")
    parser.add_argument("--power", metavar="Q", help="mean of Σ λ^q for a real q, such as 1/2")
    parser.add_argument("--entropy", action="store_true", help="mean of −Σ λ ln λ")
    parser.add_argument("--log", type=whole, metavar="K", help="mean of Σ λ^k ln λ")
    parser.add_argument("--ordered", action="store_true", help="of the ordered spectrum λ1 ≥ … ≥ λN; alone: each mean")
    parser.add_argument("--table", type=whole, metavar="DEGREE", help="all monomials up to a degree")
    parser.add_argument("--to", choices=tuple(FORMATS), help="format of the table (default text)")
    parser.add_argument("-o", "--output", type=Path, metavar="FILE", help="save the table; its ending picks the format")
    parser.add_argument("--route", metavar="R", help="compute monomials and power sums by this formula")
    parser.add_argument(
        "--digits", type=whole, default=50, metavar="D", help="significant digits of the decimal (default 50)"
    )


def run(args: argparse.Namespace) -> int:
    """Print the mean as a fraction where it is one, as a decimal, and the formula it came from."""
    measure = _measure(args)
    if not 1 <= args.digits <= MOST_DIGITS:
        raise InputError(f"digits must be between 1 and {MOST_DIGITS}", args.digits)
    given = [f"--{name.replace('_', '-')}" for name in _QUANTITIES if _is_given(getattr(args, name))]
    if len(given) != 1 and not (args.ordered and not given):
        names = ", ".join(f"--{name.replace('_', '-')}" for name in _QUANTITIES)
        raise InputError(f"exactly one of {names} must be given", " and ".join(given) or "none")
    if args.table is None and (args.to or args.output):
        raise InputError("--to and -o must come with --table", "no --table")
    if args.route and args.exponents is None and args.power_sums is None:
        raise InputError("--route must come with --exponents or --power-sums", args.route)
    if args.table is not None:
        return _table(measure, args)
    for line in _lines(measure, args):
        print(line)
    return 0


def _is_given(value: object) -> bool:
    return value is not None and value is not False


def _measure(args: argparse.Namespace) -> Measure:
    measure = measure_of(args)
    return ordered(measure) if args.ordered else measure


def _lines(measure: Measure, args: argparse.Namespace) -> list[str]:
    digits: int = args.digits
    if args.exponents is not None:
        value = measure.moment(args.exponents, route=args.route)
        route = args.route or measure.default_route(args.exponents)
        return [f"E[{monomial(args.exponents)}] = {exact_text(value, digits)}", _by(moment_formula(measure, route))]
    if args.power_sums is not None:
        value = measure.power_sum_moment(args.power_sums, route=args.route)
        name = " ".join(f"p{k}" for k in args.power_sums)
        return [f"E[{name}] = {exact_text(value, digits)}", _by(power_sum_formula(measure, args.route))]
    if args.power is not None:
        return [_power(measure, args.power, digits), _by(real_power_formula(measure))]
    if args.entropy:
        return [f"E[−Σ λ ln λ] = {_closed(measure.entropy(), digits)}", _by(log_formula(measure, 1))]
    if args.log is not None:
        name = "λ" if args.log == 1 else f"λ^{args.log}"
        return [
            f"E[Σ {name} ln λ] = {_closed(measure.log_mean(args.log), digits)}",
            _by(log_formula(measure, args.log)),
        ]
    units = [tuple(int(i == j) for j in range(measure.N)) for i in range(measure.N)]
    means = [f"E[{monomial(unit)}] = {exact_text(measure.moment(unit), digits)}" for unit in units]
    return [*means, _by(moment_formula(measure, measure.routes[0]))]


def _by(formula: str) -> str:
    return f"formula: {formula}"


def _power(measure: Measure, text: str, digits: int) -> str:
    value = measure.power_mean(text, dps=digits)
    q = Fraction(text)
    if q.denominator == 1 and q <= 1000:
        return f"E[Σ λ^{q}] = {exact_text(measure.power_mean_exact(int(q)), digits)}"
    shown = str(q) if q.denominator == 1 else f"({q})"
    tiny = value < mp.mpf(10) ** -SMALLEST_WRITTEN_OUT
    return f"E[Σ λ^{shown}] ≈ {mp.nstr(value, digits) if tiny else to_decimal(value, digits)}"


def _closed(number: DigammaSum, digits: int) -> str:
    if number.is_rational:
        return exact_text(number.fraction, digits)
    decimal = to_decimal(number.value(digits), digits)
    form = str(number)
    return f"{form} ≈ {decimal}" if len(form) <= LONGEST_FORM else f"{decimal} to {digits} digits"


def _table(measure: Measure, args: argparse.Namespace) -> int:
    to = args.to or (format_of(args.output.suffix) if args.output else "text")
    if args.output:
        require_writable(args.output)
    formula = moment_formula(measure, measure.routes[0])
    text = render_moments(moment_table(measure, args.table, digits=args.digits, formula=formula), to)
    if args.output:
        write_atomically(args.output, text.encode())
    else:
        print(text, end="")
    return 0
