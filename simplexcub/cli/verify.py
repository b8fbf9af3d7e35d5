"""`simplexcub verify`: the second opinion on tables of nodes and weights, whoever made them."""

from __future__ import annotations

import argparse
from dataclasses import replace
from pathlib import Path

from simplexcub.cli.measure import add_measure, stated_measure
from simplexcub.cli.options import whole, whole_numbers
from simplexcub.cli.output import ProgressLine, require_writable
from simplexcub.cli.speech import complain
from simplexcub.errors import InputError, TableError
from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.table import read, save
from simplexcub.table.formats import format_of
from simplexcub.table.kind import kind_of
from simplexcub.table.reading import read_bare
from simplexcub.table.selection import select
from simplexcub.verify import verify
from simplexcub.verify.check import Report
from simplexcub.verify.embedded import check_embedded
from simplexcub.verify.match import match
from simplexcub.verify.mend import mend
from simplexcub.verify.states import moduli_rule, read_states, reduced_rule

EXAMPLE = "simplexcub verify hs.json"
ANY = "any"


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument(
        "files", nargs="+", metavar="FILE", help="tables, as JSON, CSV or text, or a quoted pattern for JSON tables"
    )
    add_measure(parser, option=True)
    parser.add_argument("-t", "--degree", type=whole, metavar="DEGREE", help="degree to mend a table to")
    parser.add_argument("--mend", type=Path, metavar="OUT", help="write the exact rule nearby, to 50 digits, to OUT")
    parser.add_argument("--states", action="store_true", help="FILE holds state vectors: npy, or CSV of re,im columns")
    parser.add_argument("--reduce", type=whole_numbers, metavar="d1,d2", help="spectra of states reduced to a factor")
    more = f"--measure {ANY} tries the flat, Hilbert-Schmidt, induced, Bures and Dirichlet 1/2 measures."
    parser.epilog = f"{more}\n\n{parser.epilog}"


def run(args: argparse.Namespace) -> int:
    """Check every moment of the degree, look for the proof, and print what was found."""
    if args.mend is not None:
        format_of(args.mend)
        require_writable(args.mend)
    if args.reduce is not None and not args.states:
        raise InputError("--reduce must come with --states", "no --states")
    if args.degree is not None and args.mend is None:
        raise InputError("--degree must come with --mend", "no --mend")
    paths = _files(args)
    if len(paths) > 1:
        return _several(paths, stated_measure(args))
    path = paths[0]
    if args.states:
        return _states(args, path)
    if args.measure == ANY:
        rule = read_bare(path, N=args.N)
        found = match(rule)
        for report in found:
            if report.exact_degree > 0:
                print(f"{'matches':<9} {report.measure} to degree {report.exact_degree}, {report.digits} digits")
        rule = replace(rule, measure=found[0].measure)
        measure: Measure | None = rule.measure
    else:
        measure = stated_measure(args)
        rule = _read(path, measure, mending=args.mend is not None)
    report = _report(rule, measure)
    if args.mend is not None:
        mended = mend(rule, measure=measure, degree=args.degree)
        save(mended, args.mend)
        print(f"{'mended':<9} degree {mended.degree}, {mended.digits} digits, written to {args.mend}")
        return 0
    return 0 if _judged(path, report) else 1


def _files(args: argparse.Namespace) -> list[Path]:
    """The files, each once; several only where each is to be checked and no more."""
    found: dict[Path, None] = {}
    for word in args.files:
        taken, left_out = select([word])
        found |= dict.fromkeys(taken)
        if left_out:
            complain(f"left out, since a pattern takes JSON tables only: {', '.join(path.name for path in left_out)}")
    alone = {"--mend": args.mend is not None, "--states": args.states, f"--measure {ANY}": args.measure == ANY}
    for option, given in alone.items():
        if given and len(found) > 1:
            raise InputError(f"{option} must come with one file", f"{len(found)} files", "Take them one by one.")
    return list(found)


def _several(paths: list[Path], measure: Measure | None) -> int:
    """A line for each file; the status is the worst of all."""
    worst, verified = 0, 0
    for path in paths:
        try:
            rule = read(path, measure=measure)
            report = _checked(rule, measure)
        except InputError as error:
            complain(str(error))
            worst = 2
            continue
        claim = f"degree {rule.degree}" if rule.degree else f"exact to degree {report.exact_degree}"
        proof = "proven" if report.proof is not None and report.proof.holds else "not proven"
        print(f"{'no' if _faults(report) else 'yes':<4} {path}: {claim}, {report.digits} digits, {proof}", flush=True)
        fine = _judged(path, report)
        verified += fine
        worst = max(worst, 0 if fine else 1)
    print(f"{verified} of {len(paths)} verified")
    return worst


def _judged(path: Path, *reports: Report) -> bool:
    """Whether all hold; if not, the user is told why."""
    faults = [reason for report in reports for reason in _faults(report)]
    if faults:
        complain(f"{path} was not verified: {'; '.join(faults)}")
    return not faults


def _faults(report: Report) -> tuple[str, ...]:
    """What is wrong; a table that claims nothing must at least average degree 1."""
    if report.reasons or report.rule.degree or report.exact_degree > 0:
        return report.reasons
    return ("not even degree 1 is averaged exactly",)


def _read(path: Path, measure: Measure | None, *, mending: bool) -> Rule:
    """The table; one that contradicts itself only where it is to be mended, and then the user is told."""
    try:
        return read(path, measure=measure)
    except TableError as error:
        if not mending:
            raise
        rule = read(path, measure=measure, damaged=True)
        complain(str(error))
        return rule


def _checked(rule: Rule, measure: Measure | None) -> Report:
    with ProgressLine() as show:
        return verify(rule, measure=measure, prove=True, progress=show)


def _report(rule: Rule, measure: Measure | None) -> Report:
    report = _checked(rule, measure)
    check = report.verification
    claim = f"degree {rule.degree}" if rule.degree else "no degree stated"
    worst = ",".join(str(a) for a in check.worst_exponents)
    facts = {
        "verified": "no" if _faults(report) else "yes",
        "measure": str(measure or rule.measure),
        "claim": f"{claim}, space {rule.space}, {rule.digits} digits{kind_of(rule).told}",
        "exact": f"to degree {report.exact_degree}, {report.digits} digits; fails at degree {check.fails_at_degree}",
        **_also(report),
        **_embedded(rule, report.measure),
        "nodes": f"{len(rule)}, at least {check.lower_bound} needed, efficiency {check.lower_bound / len(rule):.2f}",
        "moments": f"{check.moments_checked} compared, largest residual {check.max_residual} at exponents {worst}",
        "weights": "all positive" if check.positive else "not all positive",
        "inside": "all nodes on the simplex" if check.inside else "nodes off the simplex",
        **_proof(report),
        "origin": rule.provenance.method or "not stated",
    }
    for name, fact in facts.items():
        print(f"{name:<9} {fact}")
    return report


def _also(report: Report) -> dict[str, str]:
    told = [f"{c.name} off by {c.residual}" if c.residual else f"{c.name} not checked" for c in report.also]
    return {"also": "; ".join(told)} if told else {}


def _embedded(rule: Rule, measure: Measure) -> dict[str, str]:
    if rule.embedded is None:
        return {}
    check = check_embedded(rule, measure)
    means = f"{check.moments_checked} means compared, largest residual {check.max_residual}"
    return {"embedded": f"second weights to degree {check.degree}, {means}"}


def _proof(report: Report) -> dict[str, str]:
    proof = report.proof
    if proof is None:
        return {"proof": "not proven: the decimals have no degree"}
    if not proof.holds:
        return {"symmetry": proof.group, "proof": f"not proven: {proof.reason}"}
    told = f"proven: an exact rule lies within {proof.radius} of the printed decimals"
    method = f"{proof.method}, degree {proof.degree}, {proof.equations} equations in {proof.unknowns} unknowns"
    return {"symmetry": proof.group, "proof": told, "method": method}


def _states(args: argparse.Namespace, path: Path) -> int:
    """The set of states as a rule, in both spaces where these differ."""
    if args.measure is not None or args.mend is not None:
        raise InputError("--states must come without --measure and --mend", "both")
    states = read_states(path)
    if args.reduce is not None:
        if len(args.reduce) != 2:
            raise InputError("--reduce must give two dimensions", ",".join(map(str, args.reduce)))
        rules = [reduced_rule(states, *args.reduce)]
    else:
        rules = [moduli_rule(states), moduli_rule(states, "symmetric")]
    print(f"{'states':<9} {states.shape[0]} vectors of {states.shape[1]} components")
    reports = [_report(rule, rule.measure) for rule in rules]
    return 0 if _judged(path, *reports) else 1
