"""`simplexcub average`: the mean of a function of the spectrum, with its error, and more of its distribution."""

from __future__ import annotations

import argparse
from typing import Any

from mpmath import mp

from simplexcub.average.exact import Exact
from simplexcub.average.expression import ExpressionError
from simplexcub.average.functions import NAMES, SpectralFunction, Unit, exact_mean
from simplexcub.average.integrand import SPACES
from simplexcub.average.mean import MAX_EVALUATIONS, Mean, average
from simplexcub.average.spread import HIGHEST_ORDER, Distribution, distribution
from simplexcub.cli.function import GRAMMAR, function_of, python_function
from simplexcub.cli.measure import add_measure, measure_of
from simplexcub.cli.options import duration, listed, positive, whole
from simplexcub.cli.output import ProgressLine, exact_text
from simplexcub.cli.speech import complain, show_place
from simplexcub.errors import InputError
from simplexcub.measures import Measure

EXAMPLE = "simplexcub average bures -N 3 'sum(sqrt(x))**2 - 1' --tol 1e-6"
DIGITS = 50


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    add_measure(parser)
    parser.add_argument(
        "functions",
        metavar="FUNCTION",
        nargs="*",
        help=f"one of {', '.join(NAMES)}, with Q, K or E a number, as in renyi-2, gap-1, rank-0.1; or {GRAMMAR}; "
        "several give covariances too",
    )
    parser.add_argument(
        "--python", metavar="MODULE:FUNCTION", help="a function of your own; importing the module runs its code"
    )
    parser.add_argument(
        "--tol", type=positive, default=1e-6, metavar="E", help="absolute error to aim at (default 1e-6)"
    )
    parser.add_argument("--bits", action="store_true", help="entropies in bits instead of nats")
    parser.add_argument(
        "--space",
        choices=("auto", *SPACES),
        default="auto",
        help="how a function sees the components: in their order (all), largest first (ordered), or not minding "
        "(symmetric); auto finds out",
    )
    parser.add_argument(
        "--max-evaluations", type=whole, default=MAX_EVALUATIONS, metavar="M", help=f"default {MAX_EVALUATIONS}"
    )
    parser.add_argument(
        "--budget", type=duration, default=0.0, metavar="TIME", help="time to search rules where none is shipped"
    )
    parser.add_argument("--seed", type=whole, default=0, metavar="S", help="of samples (default 0)")
    parser.add_argument(
        "--moments", type=whole, metavar="K", help=f"variance and central moments up to order K, 2 to {HIGHEST_ORDER}"
    )
    parser.add_argument("--cdf", type=listed, metavar="C,...", help="P(f ≤ C) by sampling, with its standard error × 3")


def run(args: argparse.Namespace) -> int:
    """Print the mean and what is known about its error."""
    measure = measure_of(args)
    try:
        functions = _functions(args, measure)
    except ExpressionError as error:
        complain(str(error))
        show_place(*error.pointer)
        return 2
    if args.moments is not None or args.cdf is not None or len(functions) > 1:
        return _spread(args, measure, functions)
    (function,) = functions.values()
    with ProgressLine() as show:
        mean = average(
            function,
            measure,
            tol=args.tol,
            space=args.space,
            max_evaluations=args.max_evaluations,
            budget=args.budget,
            seed=args.seed,
            progress=show,
        )
    return _print_mean(mean, function)


def _functions(args: argparse.Namespace, measure: Measure) -> dict[str, Any]:
    if args.python is not None:
        if args.functions:
            raise InputError("--python must stand in place of FUNCTION", " ".join(args.functions))
        return {args.python: python_function(args.python)}
    if not args.functions:
        raise InputError("a FUNCTION is required", "none", "A name, an expression, or --python MODULE:FUNCTION.")
    if len(set(args.functions)) < len(args.functions):
        raise InputError("every FUNCTION must be given once", " ".join(args.functions))
    unit: Unit = "bits" if args.bits else "nats"
    return {text: function_of(text, measure, unit) for text in args.functions}


def _print_mean(mean: Mean, function: Any) -> int:
    if mean.exact is not None and mean.exact.fraction is not None and not mean.evaluations:
        print(f"{exact_text(mean.exact.fraction, DIGITS)}\nexact")
        return 0
    for line in _value_lines(mean):
        print(line)
    print(f"{mean.evaluations} evaluations: {mean.how}")
    if mean.exact is not None:
        print(f"exact mean {_exact_line(mean.exact)}")
    if isinstance(function, SpectralFunction) and function.is_entropic:
        print(f"unit {function.unit}")
    if not mean.met:
        complain(mean.reason)
        return 1
    return 0


def _value_lines(mean: Mean) -> list[str]:
    if isinstance(mean.value, float):
        return [f"{mean.value:.15g}", f"estimated error {mean.error:.1e}"]
    if isinstance(mean.value, complex):
        return [f"{mean.value.real:.15g} {mean.value.imag:+.15g}i", f"estimated error {mean.error:.1e}"]
    values = " ".join(f"{v:.15g}" for v in mean.value.ravel())
    return [values, "estimated errors " + " ".join(f"{e:.1e}" for e in mean.error.ravel())]


def _exact_line(exact: Exact) -> str:
    if exact.fraction is not None:
        return exact_text(exact.fraction, DIGITS)
    decimal = str(mp.nstr(exact.value, 20))
    return f"{exact.form} ≈ {decimal}" if exact.form else f"≈ {decimal}"


def _spread(args: argparse.Namespace, measure: Measure, functions: dict[str, Any]) -> int:
    points = [_number(text) for text in args.cdf or ()]
    found = distribution(
        functions,
        measure,
        orders=2 if args.moments is None else args.moments,
        points=points,
        tol=args.tol,
        space=args.space,
        max_evaluations=args.max_evaluations,
        seed=args.seed,
    )
    for i, name in enumerate(found.names):
        print(name)
        print(f"  mean      {found.mean[i]:.12g}  estimated error {found.mean_error[i]:.1e}")
        exact = exact_mean(functions[name], measure)
        if exact is not None:
            print(f"  exact     {_exact_line(exact)}")
        print(f"  variance  {found.variance[i]:.12g}  estimated error {found.variance_error[i]:.1e}")
        for k in range(3, len(found.moments) + 2):
            value, error = found.moments[k - 2, i], found.moments_error[k - 2, i]
            print(f"  moment {k}  {value:.12g}  estimated error {error:.1e}")
        for point, share, error in zip(points, found.cdf[i], found.cdf_error[i], strict=True):
            print(f"  P(f ≤ {point:g})  {share:.4f}  three standard errors {error:.1e}, {found.samples} samples")
    _print_covariances(found)
    print(f"{found.evaluations} evaluations: {found.how}")
    if found.reason:
        complain(found.reason)
        return 1
    return 0


def _print_covariances(found: Distribution) -> None:
    for i, first in enumerate(found.names):
        for j in range(i + 1, len(found.names)):
            value, error = found.covariance[i, j], found.covariance_error[i, j]
            print(f"covariance of {first} and {found.names[j]}\n  {value:.12g}  estimated error {error:.1e}")


def _number(text: str) -> float:
    try:
        return float(text)
    except ValueError:
        raise InputError("--cdf must be numbers separated by commas", repr(text)) from None
