"""Make the shipped tables: ``python -m simplexcub.table.build``; anyone can rerun it, and it only ever improves them.

Each wanted rule is searched for, verified, and kept if no table of its kind has as few nodes. A first run with
``--symmetry full`` makes the fully symmetric rules; a second with ``--symmetry best`` adds those that need fewer nodes
with less symmetry. ``--space symmetric`` and ``--space ordered`` make the rules for functions of the spectrum. The
index is remade from the files at the end, also when the run is interrupted.
"""

from __future__ import annotations

import logging
from collections.abc import Callable, Collection, Iterable, Iterator, Sequence
from pathlib import Path

from simplexcub.errors import NothingFound
from simplexcub.measures import Measure, bures, flat, hilbert_schmidt
from simplexcub.rule import Rule, Space
from simplexcub.search import solve
from simplexcub.table.campaign import DIGITS, keep, options_of, status
from simplexcub.table.describe import counted
from simplexcub.table.files import read_text
from simplexcub.table.formats import save
from simplexcub.table.kind import Kind, is_plain, place_for
from simplexcub.table.reading import parse
from simplexcub.table.record import SPACES
from simplexcub.table.shipped import reindex
from simplexcub.verify import verify

log = logging.getLogger(__name__)

# Degrees per space and number of components. Gauss rules (N = 2) have odd degree, on symmetric functions 4 m − 1.
DEGREES: dict[Space, dict[int, Sequence[int]]] = {
    "all": {
        **{2: range(1, 42, 2), 3: (*range(1, 31), 40, 50), 4: (*range(1, 15), 16, 20)},
        **{5: range(1, 11), 6: range(1, 9)},
    },
    "symmetric": {
        **{2: range(3, 44, 4), 3: range(1, 21), 4: range(1, 13), 5: range(1, 13), 6: range(1, 13)},
        **dict.fromkeys((8, 16, 32, 64), (6, 8, 10)),
    },
    "ordered": {2: range(1, 20, 2), 3: range(1, 11), 4: range(1, 7)},
}
LARGEST_SIMPLEX = 6  # more components only as spectra of states
SIZES = sorted({n for degrees in DEGREES.values() for n in degrees})


def targets(
    families: Collection[str] = (),
    sizes: Collection[int] = (),
    only: Collection[int] = (),
    space: Space = "all",
) -> Iterator[tuple[Measure, int]]:
    """The (measure, degree) pairs of the shipped set, cheapest first; empty arguments stand for all."""
    for n, degrees in DEGREES[space].items():
        measures: tuple[Measure, ...] = (hilbert_schmidt(n),)
        if n <= LARGEST_SIMPLEX:
            # Bures has no exact moments of the ordered spectrum.
            measures = (flat(n), hilbert_schmidt(n), *(() if space == "ordered" else (bures(n),)))
        for measure in measures:
            if (not families or measure.family in families) and (not sizes or n in sizes):
                yield from ((measure, degree) for degree in degrees if not only or degree in only)


def build(
    wanted: Iterable[tuple[Measure, int]],
    *,
    where: Path,
    budget: float,
    seed: int = 0,
    jobs: int = 1,
    space: Space = "all",
    symmetry: str = "full",
    only_missing: bool = False,
    say: Callable[[str], None] = log.info,
) -> list[Path]:
    """Search for each wanted rule, keep those that are better than what is there, and remake the index.

    Parameters
    ----------
    wanted : iterable of (Measure, int)
        Measures and degrees.
    where : Path
        The folder of tables.
    budget : float
        Seconds of search for each rule.
    seed, jobs, space, symmetry
        Passed to the search; with less than full symmetry only rules with fewer nodes than every other are kept.
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
        for measure, degree in wanted:
            name = f"{measure}, degree {degree}"
            if only_missing and _exists(measure, degree, where, space):
                continue
            try:
                rule = solve(
                    measure,
                    degree,
                    space=space,
                    symmetry=symmetry,
                    digits=DIGITS,
                    seed=seed,
                    budget=budget,
                    jobs=jobs,
                )
            except NothingFound:
                say(f"{name}: no rule in {budget:g} s")
                continue
            if rule.provenance.method.startswith("conical product"):
                say(f"{name}: no rule in {budget:g} s")
                continue
            if space == "all" and rule.symmetry != "full" and not _fewest(rule, where):
                say(f"{name}: {counted(len(rule), 'node')}, no fewer than with full symmetry")
                continue
            written += keep(rule, where, name, say)
    finally:
        reindex(where)
    return written


def refresh(where: Path, say: Callable[[str], None] = log.info) -> None:
    """Verify every table again and write its verification anew; the numbers stay as they are."""
    for path in sorted(where.glob("*/*/*.json")):
        rule = parse(read_text(path), str(path))
        report = verify(rule, prove=True)
        proven = "proven" if report.proof is not None and report.proof.holds else "not proven"
        say(f"{path.relative_to(where)}: {'; '.join(report.reasons) or 'holds'}, {proven}")
        if report.verification != rule.verification:
            save(rule.verified(report.verification), path)
    reindex(where)


def _exists(measure: Measure, degree: int, where: Path, space: Space) -> bool:
    kind = Kind(space, "none" if space == "ordered" else "full").stem(degree)
    return any((where / place_for(measure)).glob(f"{kind}-*.json"))


def _fewest(rule: Rule, where: Path) -> bool:
    """Whether a rule beats every table of its measure and degree; those without full symmetry then go."""
    every = (where / place_for(rule.measure)).glob(f"{rule.space}-*-t{rule.degree:02d}-*.json")
    tables = [path for path in every if is_plain(path.stem)]
    if any(int(path.stem.rsplit("-", 1)[1]) <= len(rule) for path in tables):
        return False
    for path in tables:
        if not path.name.startswith(Kind(rule.space, "full").stem(rule.degree)):
            path.unlink()
    return True


def main(argv: Sequence[str] | None = None) -> int:
    """Run the build; status 0, or 2 with one line on bad input."""
    parser = options_of("build", __doc__, SIZES, 60.0)
    parser.add_argument("-t", type=int, action="append", default=[], metavar="DEGREE", help="only this degree")
    parser.add_argument("--space", choices=SPACES, default="all", help="what the rules are exact for (default all)")
    parser.add_argument("--symmetry", default="full", help="of the node sets: full (default), best, or a group's name")
    parser.add_argument("--jobs", type=int, default=1, help="processes (default 1)")
    parser.add_argument("--index", action="store_true", help="only remake the index from the tables")
    parser.add_argument("--verify", action="store_true", help="only verify every table again")
    options = parser.parse_args(argv)

    def campaign() -> None:
        if options.verify:
            refresh(options.folder)
            return
        build(
            () if options.index else targets(options.measure, options.N, options.t, options.space),
            where=options.folder,
            budget=options.budget,
            seed=options.seed,
            jobs=options.jobs,
            space=options.space,
            symmetry=options.symmetry,
            only_missing=options.only_missing,
        )

    return status(campaign)


if __name__ == "__main__":
    raise SystemExit(main())
