"""What the commands that make the shipped tables have in common: their options, and the last step of each rule."""

from __future__ import annotations

import argparse
import logging
import sys
from collections.abc import Callable, Collection
from pathlib import Path

from simplexcub.errors import SimplexcubError
from simplexcub.measures import FAMILIES
from simplexcub.rule import Rule
from simplexcub.table.describe import counted
from simplexcub.table.shipped import add, folder
from simplexcub.verify import verify

log = logging.getLogger(__name__)

DIGITS = 50


def keep(rule: Rule, where: Path, name: str, say: Callable[[str], None]) -> list[Path]:
    """Verify and prove the rule, write its table where it beats the one that is there, and say so.

    Returns
    -------
    list of Path
        The file written, if any.
    """
    report = verify(rule, prove=True)
    if not (report.holds and report.verification.positive and report.verification.inside):
        say(f"{name}: {'; '.join(report.reasons) or 'not positive and inside'}")
        return []
    if report.proof is not None and not report.proof.holds:
        say(f"{name}: not proven: {report.proof.reason}")
    path = add(rule.verified(report.verification), where)
    say(f"{name}: {counted(len(rule), 'node')}, {'kept' if path else 'no better than the table that is there'}")
    return [path] if path else []


def options_of(module: str, doc: str | None, sizes: Collection[int], budget: float) -> argparse.ArgumentParser:
    """A parser with the options that every campaign has."""
    parser = argparse.ArgumentParser(prog=f"python -m simplexcub.table.{module}", description=doc)
    parser.add_argument("--measure", choices=FAMILIES, action="append", default=[], help="only this family")
    parser.add_argument("-N", type=int, choices=sizes, action="append", default=[], help="only this N")
    parser.add_argument(
        "--budget", type=float, default=budget, metavar="SECONDS", help=f"for each rule (default {budget:g})"
    )
    parser.add_argument("--seed", type=int, default=0, help="of the search (default 0)")
    parser.add_argument("--only-missing", action="store_true", help="skip rules that have a table already")
    parser.add_argument("--folder", type=Path, default=folder(), help="folder of tables (default: the shipped ones)")
    return parser


def status(campaign: Callable[[], object]) -> int:
    """Run it, with its lines on standard error; 0, or 2 with one line on bad input."""
    logging.basicConfig(level=logging.INFO, format="%(message)s", stream=sys.stderr)
    try:
        campaign()
    except SimplexcubError as error:
        log.error("%s", error)
        return 2
    return 0
