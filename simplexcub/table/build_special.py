"""Make the special shipped tables: ``python -m simplexcub.table.build_special``; it only ever improves them.

``equal``: rules of equal weights, for two components all numbers of nodes that exist. ``entropic``: rules that average
the entropy exactly as well. ``embedded``: the cheapest plain tables with a second column of weights. Each is verified
and proven where it can be; with ``--only-missing`` what is there is skipped.
"""

from __future__ import annotations

import logging
from collections.abc import Callable, Collection, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from simplexcub.errors import NothingFound
from simplexcub.measures import Measure, bures, flat, hilbert_schmidt
from simplexcub.rule import Rule
from simplexcub.search import embed, solve
from simplexcub.table.campaign import DIGITS, keep, options_of, status
from simplexcub.table.kind import Kind, place_for
from simplexcub.table.shipped import load, reindex

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
            written += keep(rule, where, name, say)
    finally:
        reindex(where)
    return written


def main(argv: Sequence[str] | None = None) -> int:
    """Run the build; status 0, or 2 with one line on bad input."""
    parser = options_of("build_special", __doc__, (2, 3, 4), 30.0)
    parser.add_argument("--kind", choices=DEGREES, action="append", default=[], help="only this kind")
    options = parser.parse_args(argv)
    wanted = targets(options.kind, options.measure, options.N)
    return status(
        lambda: build(
            wanted,
            where=options.folder,
            budget=options.budget,
            seed=options.seed,
            only_missing=options.only_missing,
        )
    )


if __name__ == "__main__":
    raise SystemExit(main())
