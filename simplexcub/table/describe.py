"""What stands beside every printed rule: one list of labelled facts, which each format lays out in its own way."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import NamedTuple

from simplexcub.entropic import named
from simplexcub.measures import Measure
from simplexcub.rule import Rule, Verification
from simplexcub.table.kind import special_of
from simplexcub.table.sheet import SECOND
from simplexcub.verify.embedded import embedded_faults
from simplexcub.verify.entropic import also_faults
from simplexcub.verify.printed import read_printed
from simplexcub.verify.structure import claim_faults, is_invariant, node_faults, weight_faults

EXACT_FOR = {
    "all": "every polynomial of degree ≤ {}",
    "symmetric": "every symmetric polynomial of degree ≤ {}",
    "ordered": "every polynomial of degree ≤ {} in the ordered spectrum λ1 ≥ … ≥ λN",
}
_KINDS = {"all": "", "symmetric": "symmetric ", "ordered": "ordered "}
SEPARATOR = ", and "  # between the polynomials and each further function
_NAMES = {
    "flat": "Flat measure",
    "dirichlet": "Dirichlet measure",
    "hilbert-schmidt": "Hilbert–Schmidt eigenvalue measure",
    "induced": "Induced eigenvalue measure",
    "bures": "Bures eigenvalue measure",
}
_SUPERSCRIPT = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")
_TEX = {
    "\\": r"\textbackslash{}",
    "&": r"\&",
    "%": r"\%",
    "$": r"\$",
    "#": r"\#",
    "_": r"\_",
    "{": r"\{",
    "}": r"\}",
    "~": r"\textasciitilde{}",
    "^": r"\textasciicircum{}",
    "–": "--",
    "−": "$-$",
    "≤": r"$\le$",
    "≥": r"$\ge$",
    "…": r"\dots{}",
    "λ": r"$\lambda$",
    "α": r"$\alpha$",
    "×": r"$\times$",
    "Σ": r"$\Sigma$",
    "·": r"$\cdot$",
    "ł": r"\l{}",
    "ż": r"\.z",
    "Ż": r"\.Z",
    "ó": r"\'o",
    "é": r"\'e",
    "ö": r"\"o",
    "ü": r"\"u",
    "ä": r"\"a",
}


class Fact(NamedTuple):
    """One line of the description: what it is about, in plain text and in LaTeX."""

    label: str
    text: str
    tex: str


def heading(rule: Rule) -> str:
    """What the rule is, in a few words."""
    further = "".join(f" and {named(name).formula}" for name in rule.also)
    degree = f"{_KINDS[rule.space]}degree {rule.degree}{further}"
    kind = special_of(rule, functions=False)
    return ", ".join([measure_name(rule.measure), degree, counted(len(rule), noun(rule)), *([kind] if kind else [])])


def noun(rule: Rule) -> str:
    """What the points of a rule are: nodes, or representatives of orbits."""
    return "representative" if rule.space == "symmetric" else "node"


def measure_name(measure: Measure) -> str:
    """The measure in words, with its parameters."""
    record = measure.parameters()
    name = _NAMES.get(measure.family, measure.family)
    shown = {k: v for k, v in record.items() if k != "family" and not (k == "K" and v == measure.N)}
    return ", ".join([name, *(f"{k} = {_plain(v)}" for k, v in shown.items())])


def measure_line(measure: Measure) -> str:
    """The measure as its table record reads, e.g. ``induced, N = 3, K = 5``."""
    record = measure.parameters()
    return ", ".join([measure.family, *(f"{k} = {_plain(v)}" for k, v in record.items() if k != "family")])


def status(rule: Rule) -> str:
    """``verified``, or ``NOT VERIFIED: `` and the reason; a rule of degree 0 claims nothing, so it has neither."""
    found = rule.verification
    if found is None:
        return "NOT VERIFIED: it has not been checked"
    if found.fails_at_degree <= rule.degree:
        return (
            f"NOT VERIFIED: degree {found.fails_at_degree} already fails; "
            f"the worst mean, that of {monomial(found.worst_exponents)}, is off by {found.max_residual}"
        )
    if rule.degree == 0:
        return f"no degree is claimed; as printed the rule is exact to degree {found.fails_at_degree - 1}"
    printed = read_printed(rule)
    weights = weight_faults(printed, equal=rule.equal_weights)
    faults = [*weights, *node_faults(printed), *claim_faults(rule, printed)]
    faults += also_faults(rule, rule.measure, printed)
    faults += embedded_faults(
        rule, rule.measure, printed, invariant=rule.measure.is_symmetric and is_invariant(printed)
    )
    if faults:
        return f"NOT VERIFIED: {'; '.join(faults)}"
    unknown = [name for name in rule.also if name.startswith("user:")]
    return f"verified, but for {', '.join(unknown)}, of which a table has only the name" if unknown else "verified"


def facts(rule: Rule) -> list[Fact]:
    """The labelled facts, in the order in which they are printed."""
    measure = rule.measure
    plain, tex = measure.density()
    coordinates = range(1, measure.N)
    with_respect = " ".join(f"dλ{i}" for i in coordinates)
    tex_differential = r"\,".join(rf"d\lambda_{{{i}}}" for i in coordinates)
    if measure.N > 4:
        with_respect = f"dλ1 … dλ{measure.N - 1}"
        tex_differential = rf"d\lambda_1\cdots d\lambda_{{{measure.N - 1}}}"
    state = status(rule)
    exact_for = SEPARATOR.join([EXACT_FOR[rule.space].format(rule.degree), *(named(x).formula for x in rule.also)])
    source = rule.provenance
    made_by = f"{source.package}, seed {source.seed}, {source.date}"
    return [
        _fact("status", state),
        _fact("measure", measure_line(measure)),
        Fact("density", f"{plain}  with respect to {with_respect}", rf"${tex}$ with respect to ${tex_differential}$"),
        _fact("exact for", exact_for),
        *([_fact("also", ", ".join(rule.also))] if rule.also else []),
        _fact("space", rule.space),
        _fact("degree", str(rule.degree)),
        _fact("nodes", _nodes(rule)),
        _fact("symmetry", rule.symmetry),
        _fact("weights", _weights(rule)),
        *_further_weights(rule),
        _fact("digits", str(rule.digits)),
        *_checks(rule.verification, rule),
        _fact("made by", " ".join(made_by.split())),
        _fact("method", " ".join(source.method.split()) or "not stated"),
    ]


def monomial(exponents: Sequence[int]) -> str:
    """λ1² λ3 and the like; 1 for the constant."""
    powers = [f"λ{i}" + (str(a).translate(_SUPERSCRIPT) if a > 1 else "") for i, a in enumerate(exponents, 1) if a]
    return " ".join(powers) or "1"


def counted(number: int, noun: str) -> str:
    """``1 node``, ``3 nodes``."""
    return f"{number} {noun}" + ("" if number == 1 else "s")


def escape(text: str) -> str:
    """Plain text as LaTeX; what a plain article cannot set becomes a question mark."""
    return "".join(_TEX.get(c, c if c.isascii() else "?") for c in text)


def _fact(label: str, text: str) -> Fact:
    subscripts = re.compile(r"λ([0-9]+|N)")
    pieces = subscripts.split(text)
    tex = "".join(rf"$\lambda_{{{piece}}}$" if k % 2 else escape(piece) for k, piece in enumerate(pieces))
    return Fact(label, text, tex)


def _nodes(rule: Rule) -> str:
    orbits = f" in {counted(len(rule.orbits), 'orbit')}" if rule.orbits else ""
    if rule.space == "symmetric":
        return f"{counted(len(rule), noun(rule))}, one ordered spectrum for each orbit"
    return f"{len(rule)}, each an ordered spectrum" if rule.space == "ordered" else f"{len(rule)}{orbits}"


def _weights(rule: Rule) -> str:
    signs = "positive" if min(rule.weights) > 0 else "some not positive"
    return f"{signs}, all equal" if rule.equal_weights else signs


def _further_weights(rule: Rule) -> list[Fact]:
    found = []
    if rule.integer_weights:
        shown = " ".join(map(str, rule.integer_weights))
        found.append(_fact("integers", f"the weights times {sum(rule.integer_weights)}: {shown}"))
    if rule.embedded:
        found.append(_fact("embedded", f"weights {SECOND} on the same nodes, to degree {rule.embedded.degree}"))
    return found


def efficiency(bound: int, nodes: int) -> str:
    """Least number of nodes that any rule of the degree has, as a share of those that this one has."""
    return f"{bound / nodes:.2f}"


def _checks(found: Verification | None, rule: Rule) -> list[Fact]:
    if found is None:
        return []
    nodes = len(rule)
    share = efficiency(found.lower_bound, nodes)
    worst = monomial(found.worst_exponents)
    tex_worst = "".join(
        rf"\lambda_{{{i}}}" + (f"^{{{a}}}" if a > 1 else "") for i, a in enumerate(found.worst_exponents, 1) if a
    )
    tried = counted(found.moments_checked, "moment")
    checks = [
        Fact(
            "checked",
            f"{tried}; largest error {found.max_residual}, in the mean of {worst}",
            rf"{tried}; largest error {_scientific(found.max_residual)}, in the mean of ${tex_worst or '1'}$",
        ),
        _fact("first failure", f"at degree {found.fails_at_degree}"),
        _fact("inside", "all nodes lie on the simplex" if found.inside else "not all nodes lie on the simplex"),
        _fact("lower bound", f"no rule of this degree has fewer than {counted(found.lower_bound, noun(rule))}"),
        _fact("efficiency", f"{share} = {found.lower_bound}/{nodes}, bound / {noun(rule)}s"),
    ]
    if found.proof is not None:
        checks.append(_proof(found.proof))
    return checks


def _proof(proof: dict[str, object]) -> Fact:
    method, radius = str(proof.get("method", "not stated")), str(proof.get("radius", "not stated"))
    if proof.get("holds") is not True:
        reason = " ".join(str(proof.get("reason", f"{method} did not succeed")).split())
        return _fact("proof", f"none: {reason}")
    text = f"an exact rule lies within {radius} of the printed numbers ({method})"
    return Fact("proof", text, escape(text).replace(escape(radius), _scientific(radius), 1))


def _scientific(number: str) -> str:
    match = re.fullmatch(r"([+-]?[0-9.]+)[eE]([+-]?[0-9]+)", number)
    if match is None:
        return escape(number)
    factor = "" if match[1] == "1" else rf"{match[1]}\times"
    return f"${factor}10^{{{int(match[2])}}}$"


def _plain(value: object) -> str:
    return " ".join(str(item) for item in value) if isinstance(value, list) else str(value)
