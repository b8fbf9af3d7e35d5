"""`simplexcub verify`: the second opinion on a table of nodes and weights, whoever made it."""

from __future__ import annotations

import argparse
from pathlib import Path

from simplexcub.cli.measure import add_measure, stated_measure
from simplexcub.cli.output import ProgressLine
from simplexcub.cli.speech import complain
from simplexcub.table import read
from simplexcub.verify import verify

EXAMPLE = "simplexcub verify hs.json"


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("file", type=Path, metavar="FILE", help="a table, as JSON, CSV or text")
    add_measure(parser, option=True)


def run(args: argparse.Namespace) -> int:
    """Check every moment of the degree and print what was found."""
    measure = stated_measure(args)
    rule = read(args.file, measure=measure)
    with ProgressLine() as show:
        report = verify(rule, measure=measure, progress=show)
    check = report.verification
    claim = f"degree {rule.degree}" if rule.degree else "no degree stated"
    worst = ",".join(str(a) for a in check.worst_exponents)
    facts = {
        "verified": "yes" if report.holds else "no",
        "measure": str(measure or rule.measure),
        "claim": f"{claim}, space {rule.space}, {rule.digits} digits",
        "exact": f"to degree {report.exact_degree}, {report.digits} digits; fails at degree {check.fails_at_degree}",
        "nodes": f"{len(rule)}, at least {check.lower_bound} needed",
        "moments": f"{check.moments_checked} compared, largest residual {check.max_residual} at exponents {worst}",
        "weights": "all positive" if check.positive else "not all positive",
        "inside": "all nodes on the simplex" if check.inside else "nodes off the simplex",
    }
    for name, fact in facts.items():
        print(f"{name:<9} {fact}")
    if not report.holds:
        complain(f"{args.file} was not verified: {'; '.join(report.reasons)}")
        return 1
    return 0
