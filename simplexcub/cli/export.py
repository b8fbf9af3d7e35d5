"""`simplexcub export`: tables in another format, one or a whole selection."""

from __future__ import annotations

import argparse
from dataclasses import dataclass, replace
from pathlib import Path

from simplexcub.cli.measure import add_measure, stated_measure
from simplexcub.cli.options import whole
from simplexcub.cli.output import ProgressLine, require_writable
from simplexcub.cli.speech import complain
from simplexcub.errors import InputError
from simplexcub.rule import Rule
from simplexcub.table import FORMATS, encode, format_of, read
from simplexcub.table.files import write_atomically
from simplexcub.table.rounding import rounded
from simplexcub.table.selection import select, short_names
from simplexcub.verify import verify

EXAMPLE = "simplexcub export 'tables/hilbert-schmidt/N3/*' --to latex --standalone -o appendix.tex"
FORMS = ("orbits", "full")


@dataclass(frozen=True)
class _Step:
    """Progress: which file of how many."""

    text: str


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    several = ", ".join(name for name, form in FORMATS.items() if form.several)
    parser.add_argument(
        "files", nargs="+", metavar="FILE", help="tables, or a quoted pattern; of several, JSON ones only"
    )
    parser.add_argument("--to", choices=tuple(FORMATS), help="format to write; by default the ending of -o chooses it")
    parser.add_argument("-o", "--output", metavar="FILE", help="save here; a folder, such as csv/, gets one per table")
    parser.add_argument("--up-to", type=whole, metavar="DEGREE", help="only rules of this degree or less")
    parser.add_argument(
        "--form", choices=FORMS, help="one entry per orbit, or every node (default: orbits if possible)"
    )
    parser.add_argument("--digits", type=whole, metavar="D", help="round to D significant digits, and check again")
    parser.add_argument("--standalone", action="store_true", help="a LaTeX document that compiles as it is")
    add_measure(parser, option=True, use="measure of tables that name none")
    parser.epilog = f"Formats that hold several rules in one file: {several}.\n\n{parser.epilog}"


def run(args: argparse.Namespace) -> int:
    """Read, verify where a table carries no verification, and write."""
    to = _format(args)
    output = Path(args.output) if args.output else None
    into_folder = output is not None and _is_folder(args.output)
    if output is not None and not into_folder:
        require_writable(output)
    paths, left_out = select(args.files)
    if len(paths) > 1 and not into_folder and not FORMATS[to].several:
        able = " or ".join(name for name, form in FORMATS.items() if form.several)
        remedy = f"Take {able}, or give a folder: -o {to}/"
        raise InputError(f"{to} holds one rule in a file", f"{len(paths)} files", remedy)
    if left_out:
        complain(f"left out, since of several files only JSON tables are taken: {', '.join(p.name for p in left_out)}")
    measure = stated_measure(args)
    with ProgressLine() as show:
        kept: list[tuple[Path, Rule]] = []
        holds = True
        for k, path in enumerate(paths, 1):
            show(_Step(f"reading {k} of {len(paths)}: {path.name}"))
            rule = read(path, measure=measure)
            if args.up_to is None or rule.degree <= args.up_to:
                rule, fine = _checked(rule, path, show)
                kept.append((path, _shaped(rule, path, args)))
                holds = holds and fine
        if not kept:
            raise InputError("some rule must be of the degree that --up-to allows", args.up_to, "Raise it.")
        if output is not None and into_folder:
            _write_each(kept, to, output, args.standalone, show)
        else:
            show(_Step(f"writing {len(kept)} tables"))
            data = encode([rule for _, rule in kept], to, standalone=args.standalone, screen=output is None)
            if output is not None:
                write_atomically(output, data)
    if output is None:
        print(data.decode("utf-8"), end="")
    return 0 if holds else 1


def _format(args: argparse.Namespace) -> str:
    if args.to is None and args.output is None:
        raise InputError(
            "export must be told the format", "neither --to nor -o", f"--to is one of {', '.join(FORMATS)}."
        )
    if args.to is None and _is_folder(args.output):
        raise InputError("a folder must come with --to", f"-o {args.output}", f"--to is one of {', '.join(FORMATS)}.")
    to: str = args.to if args.to is not None else format_of(args.output)
    if args.standalone and to != "latex":
        raise InputError("--standalone must come with --to latex", to)
    return to


def _is_folder(path: str) -> bool:
    return path.endswith("/") or Path(path).is_dir()


def _checked(rule: Rule, path: Path, show: ProgressLine) -> tuple[Rule, bool]:
    """The rule with its verification, and whether it holds; bare numbers claim what they are found to be exact for."""
    if rule.verification is not None:
        return rule, True
    report = verify(rule, progress=show)
    if not report.holds:
        complain(f"{path} was not verified: {'; '.join(report.reasons)}")
    degree = rule.degree or max(report.exact_degree, 0)
    return replace(rule, degree=degree, verification=report.verification), report.holds


def _shaped(rule: Rule, path: Path, args: argparse.Namespace) -> Rule:
    """The rule in the form and with the digits that were asked for."""
    if args.form == "orbits" and not rule.orbits:
        raise InputError(
            f"{path} must have orbits to be printed by them", f"symmetry {rule.symmetry}", "Try --form full."
        )
    if args.form == "full":
        rule = replace(rule, orbits=())
    return rule if args.digits is None else rounded(rule, args.digits)


def _write_each(kept: list[tuple[Path, Rule]], to: str, target: Path, standalone: bool, show: ProgressLine) -> None:
    """One file per rule, whole or not at all; the folder is made if need be."""
    names = short_names(path for path, _ in kept)
    try:
        target.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise InputError(f"{target} must be a folder", (error.strerror or str(error)).lower()) from None
    for k, (name, (_, rule)) in enumerate(zip(names, kept, strict=True), 1):
        show(_Step(f"writing {k} of {len(kept)}: {name}"))
        write_atomically(target / f"{name}{FORMATS[to].endings[0]}", encode([rule], to, standalone=standalone))
