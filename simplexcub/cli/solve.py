"""`simplexcub solve`: find a rule, check it by the second opinion, and print or save it."""

from __future__ import annotations

import argparse
from contextlib import ExitStack
from pathlib import Path

from simplexcub.cli.cluster import cluster_executor
from simplexcub.cli.interrupt import InterruptNoted
from simplexcub.cli.measure import add_measure, measure_of
from simplexcub.cli.options import duration, listed, whole
from simplexcub.cli.output import ProgressLine, require_writable
from simplexcub.cli.speech import complain
from simplexcub.errors import InputError
from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.search import embed, solve
from simplexcub.search.chosen import SETS
from simplexcub.symmetry import NAMES
from simplexcub.table import efficiency, format_of, render, save
from simplexcub.table.describe import counted, noun
from simplexcub.table.kind import kind_of
from simplexcub.table.record import SPACES
from simplexcub.verify import verify

EXAMPLE = "simplexcub solve hilbert-schmidt -N 3 -t 7 -o hs.json"


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    add_measure(parser)
    parser.add_argument("-t", "--degree", type=whole, required=True, metavar="T", help="degree of exactness")
    parser.add_argument(
        "--space",
        choices=SPACES,
        default="all",
        help="polynomials of degree ≤ T to be exact for: all (default); symmetric ones, with one node for each orbit;"
        " or all of the ordered spectrum λ1 ≥ … ≥ λN",
    )
    parser.add_argument(
        "--symmetry",
        default="full",
        metavar="NAME",
        help=f"symmetry of the node set: one of {', '.join(NAMES)}, or best, which tries several and keeps the"
        " fewest nodes (default full)",
    )
    parser.add_argument("--equal-weights", action="store_true", help="the weight 1/M for each of M nodes")
    parser.add_argument(
        "--integer-weights", type=whole, metavar="K", help="weights that are integers up to K over their sum"
    )
    parser.add_argument(
        "--also",
        type=listed,
        default=[],
        metavar="NAMES",
        help="exact for these too: entropy, entropy-K (Σ λ^K ln λ), power-Q (Σ λ^Q), separated by commas",
    )
    parser.add_argument(
        "--include", type=listed, default=[], metavar="SETS", help=f"nodes that it must have: some of {', '.join(SETS)}"
    )
    parser.add_argument(
        "--embedded", action="store_true", help="a second column of weights, of lower degree, that tells the error"
    )
    parser.add_argument("--digits", type=whole, default=50, metavar="D", help="significant digits (default 50)")
    parser.add_argument(
        "--budget", type=duration, default=60.0, metavar="TIME", help="time for the search: 90s, 2m, 1h (default 60s)"
    )
    parser.add_argument("--seed", type=whole, default=0, metavar="S", help="seed of the random starts (default 0)")
    parser.add_argument(
        "--jobs",
        type=whole,
        metavar="J",
        help="processes to search with (default 1); with --cluster, tasks at a time (default: its threads)",
    )
    parser.add_argument(
        "--resume", type=Path, metavar="DIR", help="folder that remembers finished work; a stopped search goes on there"
    )
    parser.add_argument(
        "--cluster", metavar="ADDRESS", help="search on the dask.distributed cluster with this scheduler: tcp://…"
    )
    parser.add_argument(
        "-o", "--output", type=Path, metavar="FILE", help="save here, in the format of the ending, and print a summary"
    )


def run(args: argparse.Namespace) -> int:
    """Search, verify, print."""
    measure = measure_of(args)
    if args.output:
        format_of(args.output)
        require_writable(args.output)
    with InterruptNoted() as interrupted, ProgressLine() as show:
        rule = _solved(args, measure, show)
        if args.embedded:
            rule = embed(rule)
        report = verify(rule, prove=True, progress=show)
    rule = rule.verified(report.verification)
    if rule.provenance.method == "conical product":
        complain(
            f"no smaller rule was found in time; this is the conical product rule of {counted(len(rule), noun(rule))}."
            " A longer --budget or another --seed may find fewer"
        )
    _, _, remark = rule.provenance.method.partition("; ")
    if remark:
        complain(f"{remark}; here are {len(rule)} nodes of equal weight, degree {rule.degree}")
    _deliver(rule, args.output)
    if not report.holds:
        complain(f"the rule was not verified: {'; '.join(report.reasons)}")
        return 1
    if interrupted.seen:
        complain("interrupted; the best rule so far was kept")
        return 130
    return 0


def _solved(args: argparse.Namespace, measure: Measure, show: ProgressLine) -> Rule:
    """The rule, searched for here or on a cluster."""
    with ExitStack() as stack:
        executor, jobs = None, 1
        if args.cluster is not None:
            executor, jobs = stack.enter_context(cluster_executor(args.cluster))
        return solve(
            measure,
            args.degree,
            space=args.space,
            symmetry=args.symmetry,
            equal_weights=args.equal_weights,
            integer_weights=args.integer_weights,
            also=args.also,
            include=args.include,
            digits=args.digits,
            seed=args.seed,
            budget=args.budget,
            jobs=jobs if args.jobs is None else args.jobs,
            executor=executor,
            resume=args.resume,
            progress=show,
        )


def _deliver(rule: Rule, output: Path | None) -> None:
    if output is None:
        print(render(rule, "text"), end="")
        return
    try:
        save(rule, output)
    except InputError:
        # The search is paid for: when the file fails after all, the rule still reaches the caller.
        print(render(rule, "text"), end="")
        raise
    print(f"{_summary(rule)}; saved to {output}")


def _summary(rule: Rule) -> str:
    check = rule.verification
    found = ""
    if check:
        share = efficiency(check.lower_bound, len(rule))
        found = f", at least {check.lower_bound} needed (efficiency {share}), residual {check.max_residual}"
    size = counted(len(rule), noun(rule))
    special = kind_of(rule).told
    return f"{rule.measure}, {rule.space}, degree {rule.degree}{special}: {size}, {rule.digits} digits{found}"
