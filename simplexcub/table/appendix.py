r"""Several rules as one piece of LaTeX: what they have in common, an overview, the tables, and the sources.

It is meant for the appendix of a paper; `standalone` puts a preamble around it that needs nothing beyond a plain TeX
with booktabs, longtable and geometry.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from simplexcub.rule import Rule
from simplexcub.table import tex
from simplexcub.table.as_latex import NARROW, PACKAGES, bibliography, expansion, fragment
from simplexcub.table.describe import counted, efficiency, measure_name
from simplexcub.table.kind import special_of
from simplexcub.table.sheet import sheet
from simplexcub.table.sources import numbered

_MARGIN = 20  # millimetres
_WIDE = 483.0  # points: what these margins leave of A4
_HEAD_AND_FOOT = 140.0  # points that caption, headings and footnote take
_WRAPPED = "p{44pt}"  # the last column of the overview
_KEPT_WHOLE = 450.0  # a table no taller than this is kept on one page


def appendix(rules: Sequence[Rule], *, standalone: bool = False) -> str:
    """All of `rules`, which should carry their verification, sorted by measure, space, degree and nodes.

    Parameters
    ----------
    rules : sequence of Rule
    standalone : bool
        A document that compiles as it is, on A4; otherwise a fragment for the text width of a plain article.
    """
    measures = list(dict.fromkeys(rule.measure for rule in rules))
    ordered = sorted(rules, key=lambda r: (measures.index(r.measure), r.space, r.degree, len(r), r.symmetry))
    width = _WIDE if standalone else NARROW
    cited = numbered(ordered)
    body = [*_introduction(ordered), *(_overview(ordered) if len(ordered) > 1 else ())]
    for rule in ordered:
        body += _together(fragment(rule, width, cited=cited, example=False))
    if cited:
        room = min(_KEPT_WHOLE, 50 + 22.0 * len(cited))
        body += [_with_room(room), r"\subsection*{Sources}", *bibliography(cited)]
    lines = _document(body, ordered) if standalone else [f"% In the preamble: {_packages()}", *body]
    return "\n".join(lines) + "\n"


def _packages() -> str:
    return rf"\usepackage{{{','.join(PACKAGES)}}}"


def _document(body: list[str], rules: Sequence[Rule]) -> list[str]:
    names = dict.fromkeys(tex.prose(measure_name(rule.measure)) for rule in rules)
    title = "Cubature rules on the probability simplex" if len(names) > 1 else f"Cubature rules: {next(iter(names))}"
    return [
        r"\documentclass[10pt,a4paper]{article}",
        _packages(),
        rf"\usepackage[a4paper,margin={_MARGIN}mm]{{geometry}}",
        r"\setlength{\parindent}{0pt}\setlength{\parskip}{4pt}",
        r"\begin{document}",
        rf"\section*{{{title}}}",
        *body,
        r"\end{document}",
    ]


def _introduction(rules: Sequence[Rule]) -> Iterator[str]:
    yield (
        r"A rule of degree~$t$ consists of nodes $\lambda^{(k)}$ on the simplex $\lambda_i\ge0$, $\sum_i\lambda_i=1$, "
        r"and weights~$w_k$ with $\sum_k w_k\,p(\lambda^{(k)})=\mathrm{E}[p]$ for every polynomial~$p$ of degree "
        r"$\le t$ in the space that its table names. The mean~$\mathrm{E}$ is one over a probability measure, so that "
        r"weights sum to~1."
    )
    by_orbits = [rule for rule in rules if rule.space == "all" and sheet(rule).by_orbits]
    if by_orbits:
        example = max((expansion(rule) for rule in by_orbits), key=len)
        shown = "".join(f"${piece}$" if k % 2 else piece for k, piece in enumerate(example.split("$")))
        yield (
            "Where a table lists orbits, take every different ordering of a pattern as a node, and give each of them "
            f"the weight~$w$. {shown}"
        )
    yield ""


def _overview(rules: Sequence[Rule]) -> list[str]:
    """One line per rule: what there is, and how good it is."""
    several = len({rule.measure for rule in rules}) > 1
    kinds = any(special_of(rule) for rule in rules)
    head = [*(["measure"] if several else []), "space", "degree", "symmetry", "nodes", "bound", "efficiency", "digits"]
    head += ["special"] if kinds else []
    rows = []
    for rule in rules:
        check = rule.verification
        bound = ["--", "--"] if check is None else [str(check.lower_bound), efficiency(check.lower_bound, len(rule))]
        words = measure_name(rule.measure).replace(" eigenvalue measure", "").replace(" measure", "")
        measure = [tex.prose(words)] if several else []
        cells = [*measure, rule.space, str(rule.degree), tex.prose(rule.symmetry), str(len(rule)), *bound]
        cells += [str(rule.digits), *([tex.prose(special_of(rule))] if kinds else [])]
        rows.append(" & ".join(cells) + r" \\")
    size, gap = (r"\scriptsize", "2pt") if several and kinds else (r"\footnotesize", "4pt")
    types = f"{'l' if several else ''}lrlrrrr{_WRAPPED if kinds else ''}"
    return [
        rf"\begingroup{size}\setlength{{\tabcolsep}}{{{gap}}}\setlength{{\LTcapwidth}}{{\textwidth}}",
        rf"\begin{{longtable}}{{@{{}}{types}@{{}}}}",
        rf"\caption{{The {counted(len(rules), 'rule')} of this appendix. No rule of the degree has fewer nodes than "
        r"the bound; efficiency is bound over nodes.}\\",
        r"\toprule",
        " & ".join(head) + r" \\",
        r"\midrule\endfirsthead",
        r"\toprule",
        " & ".join(head) + r" \\",
        r"\midrule\endhead",
        r"\bottomrule\endlastfoot",
        *rows,
        r"\end{longtable}",
        r"\endgroup",
    ]


def _together(lines: list[str]) -> list[str]:
    """A table that goes to the next page where this one has no room: for all of it if it is short, else for a start."""
    rows = sum(line.endswith((r"\\", r"\\*")) for line in lines[lines.index(r"\endlastfoot") :])
    height = _HEAD_AND_FOOT + 12.0 * rows
    room = height if height <= _KEPT_WHOLE else _HEAD_AND_FOOT
    return [_with_room(room), *lines]


def _with_room(points: float) -> str:
    """LaTeX that turns the page where less than so many points of it are left."""
    return rf"\par\penalty0\ifdim\dimexpr\pagegoal-\pagetotal\relax<{points:g}pt\newpage\fi"
