"""Make the special shipped tables: ``python -m simplexcub.table.build_special``; it only ever improves them.

``equal``: rules of equal weights, for two components all numbers of nodes that exist. ``entropic``: rules that average
the entropy exactly as well. ``embedded``: the cheapest plain tables with a second column of weights. Each is verified
and proven where it can be; with ``--only-missing`` what is there is skipped.
"""

from __future__ import annotations

import argparse
import logging
import sys
from collections.abc import Callable, Collection, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from simplexcub.errors import NothingFound, SimplexcubError
from simplexcub.measures import FAMILIES, Measure, bures, flat, hilbert_schmidt
from simplexcub.rule import Rule
from simplexcub.search import embed, solve
from simplexcub.table.build import DIGITS
from simplexcub.table.describe import counted
from simplexcub.table.kind import Kind, place_for
from simplexcub.table.shipped import add, folder, load, reindex
from simplexcub.verify import verify

log = logging.getLogger(__name__)

ALSO = ("entropy",)
# Degrees per kind and number of components.
DEGREES = {
    "equal": {2: range(1, 14, 2), 3: range(1, 9), 4: range(1, 9)},
    "entropic": {2: range(3, 12, 2), 3: range(2, 11), 4: range(2, 7)},
    "embedded": {2: range(3, 22, 2), 3: range(2, 13), 4: range(3, 9)},
}


@dataclass(frozen=True)
class Target:
    """One wanted table."""

    kind: str
    measure: Measure
    degree: int

    def rule(self, budget: float, seed: int) -> Rule:
        """Search for it, or take a plain table and add to it."""
        if self.kind == "embedded":
            return embed(load(self.measure, degree=self.degree))
        equal, also = self.kind == "equal", ALSO if self.kind == "entropic" else ()
        return solve(self.measure, self.degree, equal_weights=equal, also=also, digits=DIGITS, seed=seed, budget=budget)

    def exists(self, where: Path) -> bool:
        """Whether the folder has a table of the kind for this degree."""
        also = ALSO if self.kind == "entropic" else ()
        kind = Kind("all", "*", self.kind == "equal", False, also, self.kind == "embedded")
        return any((where / place_for(self.measure)).glob(f"{kind.stem(self.degree)}-*.json"))


def targets(
    kinds: Collection[str] = (), families: Collection[str] = (), sizes: Collection[int] = ()
) -> Iterator[Target]:
    """The special tables of the shipped set, cheapest first; empty arguments stand for all."""
    for kind, degrees in DEGREES.items():
        for n, here in degrees.items():
            for measure in (flat(n), hilbert_schmidt(n), bures(n)):
                asked = (
                    not kinds or kind in kinds,
                    not families or measure.family in families,
                    not sizes or n in sizes,
                )
                if all(asked):
                    yield from (Target(kind, measure, degree) for degree in here)


def build(
    wanted: Iterator[Target],
    *,
    where: Path,
    budget: float,
    seed: int = 0,
    only_missing: bool = False,
    say: Callable[[str], None] = log.info,
) -> list[Path]:
    """Make each wanted table, keep it where it is verified and cheaper than what is there; remake the index.

    Parameters
    ----------
    wanted : iterator of Target
    where : Path
        The folder of tables.
    budget : float
        Seconds of search for each rule.
    seed : int
    only_missing : bool
        Skip what has a table already.
    say : callable
        Receives one line per rule.

    Returns
    -------
    list of Path
        The files written.
    """
    written: list[Path] = []
    try:
        for target in wanted:
            name = f"{target.kind}, {target.measure}, degree {target.degree}"
            if only_missing and target.exists(where):
                continue
            try:
                rule = target.rule(budget, seed)
            except NothingFound as nothing:
                say(f"{name}: {nothing.tried}")
                continue
            report = verify(rule, prove=True)
            if not (report.holds and report.verification.positive and report.verification.inside):
                say(f"{name}: {'; '.join(report.reasons) or 'not positive and inside'}")
                continue
            if report.proof is not None and not report.proof.holds:
                say(f"{name}: not proven: {report.proof.reason}")
            path = add(rule.verified(report.verification), where)
            say(f"{name}: {counted(len(rule), 'node')}, {'kept' if path else 'no better than the table that is there'}")
            written += [path] if path else []
    finally:
        reindex(where)
    return written


def main(argv: Sequence[str] | None = None) -> int:
    """Run the build; status 0, or 2 with one line on bad input."""
    logging.basicConfig(level=logging.INFO, format="%(message)s", stream=sys.stderr)
    parser = argparse.ArgumentParser(prog="python -m simplexcub.table.build_special", description=__doc__)
    parser.add_argument("--kind", choices=DEGREES, action="append", default=[], help="only this kind")
    parser.add_argument("--measure", choices=FAMILIES, action="append", default=[], help="only this family")
    parser.add_argument("-N", type=int, choices=(2, 3, 4), action="append", default=[], help="only this N")
    parser.add_argument("--budget", type=float, default=30.0, metavar="SECONDS", help="for each rule (default 30)")
    parser.add_argument("--seed", type=int, default=0, help="of the search (default 0)")
    parser.add_argument("--only-missing", action="store_true", help="skip rules that have a table already")
    parser.add_argument("--folder", type=Path, default=folder(), help="folder of tables (default: the shipped ones)")
    options = parser.parse_args(argv)
    try:
        build(
            targets(options.kind, options.measure, options.N),
            where=options.folder,
            budget=options.budget,
            seed=options.seed,
            only_missing=options.only_missing,
        )
    except SimplexcubError as error:
        log.error("%s", error)
        return 2
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
