"""`simplexcub export`: a table in another format."""

from __future__ import annotations

import argparse
from dataclasses import replace
from pathlib import Path

from simplexcub.cli.measure import add_measure, stated_measure
from simplexcub.cli.output import ProgressLine, require_writable
from simplexcub.cli.speech import complain
from simplexcub.table import FORMATS, read, render, save
from simplexcub.verify import verify

EXAMPLE = "simplexcub export hs.json --to latex -o hs.tex"


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("file", type=Path, metavar="FILE", help="a table, as JSON, CSV or text")
    parser.add_argument("--to", choices=tuple(FORMATS), required=True, help="format to write")
    parser.add_argument("-o", "--output", type=Path, metavar="FILE", help="save here instead of printing")
    add_measure(parser, option=True)


def run(args: argparse.Namespace) -> int:
    """Read, verify where the table carries no verification, and write."""
    if args.output:
        require_writable(args.output)
    rule = read(args.file, measure=stated_measure(args))
    holds = True
    if rule.verification is None:
        with ProgressLine() as show:
            report = verify(rule, progress=show)
        holds = report.holds
        # Bare rows of numbers claim no degree; what they were found to be exact for is then what is printed.
        rule = replace(rule, degree=rule.degree or max(report.exact_degree, 0), verification=report.verification)
        if not holds:
            complain(f"{args.file} was not verified: {'; '.join(report.reasons)}")
    if args.output:
        save(rule, args.output, to=args.to)
    else:
        print(render(rule, args.to), end="")
    return 0 if holds else 1
