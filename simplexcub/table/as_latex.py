r"""A LaTeX fragment for an article that loads booktabs and longtable.

One longtable, with repeated headings, then the verification and the sources in small type. Of an orbit the weight of
each node is given; that of the whole orbit is the same times its number of nodes, and is left out. An entry takes one
line where all of it fits; otherwise its numbers stand below each other. Numbers are set in blocks of five digits, and
broken only where the width of the page leaves no choice.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import NamedTuple

from simplexcub.rule import Rule
from simplexcub.table import tex
from simplexcub.table.describe import Fact, counted, facts, heading, measure_name, noun
from simplexcub.table.kind import special_of
from simplexcub.table.sheet import TOGETHER, Entry, Sheet, sheet
from simplexcub.table.sources import Source, numbered, sources

MARK = "simplexcub rule"
PACKAGES = ("booktabs", "longtable")
NARROW = 345.0  # points: the text width of a plain article at 10 pt
_GAP = 10.0  # between columns
_FOOTNOTE_LINE, _FOOTNOTE_LETTER = 9.5, 3.9  # height of a line and mean width of a letter, in points
_LONGEST_BLOCK = 24  # lines that are kept on one page
_SAID_BEFORE = ("measure", "density", "exact for", "space", "degree", "nodes", "digits")  # by the caption


class Layout(NamedTuple):
    """How a table is set: type size, column types, heading, rows."""

    size: tex.Size
    columns: str
    head: str
    rows: list[str]


def export(rule: Rule) -> str:
    """The rule as a LaTeX fragment, with its sources below."""
    cited = numbered([rule])
    packages = f"% In the preamble: \\usepackage{{{','.join(PACKAGES)}}}"
    lines = [f"% {MARK}: {heading(rule)}", packages, *fragment(rule, cited=cited), *bibliography(cited)]
    return "\n".join(lines) + "\n"


def bibliography(cited: Mapping[Source, int]) -> list[str]:
    """The numbered sources as paragraphs in small type."""
    if not cited:
        return []
    entries = [rf"\par\noindent\hangindent=2em\makebox[2em][l]{{[{k}]}}{tex.prose(s.full)}" for s, k in cited.items()]
    return [r"\par\smallskip{\footnotesize\raggedright", *entries, r"\par}"]


def fragment(
    rule: Rule, width: float = NARROW, *, cited: Mapping[Source, int] | None = None, example: bool = True
) -> list[str]:
    """The lines of the table and its footnote.

    Parameters
    ----------
    rule : Rule
    width : float
        Text width in points.
    cited : mapping, optional
        Numbers of the sources, for the footnote.
    example : bool
        Whether the caption shows how a pattern is expanded.
    """
    page = _without_orbit_weights(sheet(rule))
    said = {fact.label: fact for fact in facts(rule)}
    layout = _wide(page, width) or _tall(page, width)
    across = len(layout.columns)
    footnote = _footnote(rule, said, cited or {})
    room = round(_FOOTNOTE_LINE * (1 + len(footnote) * _FOOTNOTE_LETTER / width))
    # Every page keeps room for the footnote, so that it stays with the last row; at the end the room is taken back.
    return [
        rf"\begingroup{layout.size.command}\emergencystretch=3em",
        rf"\setlength{{\tabcolsep}}{{{_GAP / 2:g}pt}}\setlength{{\LTcapwidth}}{{\textwidth}}",
        r"\setlength{\LTpost}{2pt}",
        rf"\begin{{longtable}}{{@{{}}{layout.columns}@{{}}}}",
        rf"\caption{{{_caption(rule, page, said, example=example)}}}\\",
        r"\toprule",
        layout.head,
        r"\midrule",
        r"\endfirsthead",
        rf"\multicolumn{{{across}}}{{@{{}}l@{{}}}}{{\emph{{continued}}}}\\",
        r"\toprule",
        layout.head,
        r"\midrule",
        r"\endhead",
        rf"\midrule\multicolumn{{{across}}}{{r@{{}}}}{{\emph{{continues}}}}\\\noalign{{\vskip {room}pt}}",
        r"\endfoot",
        rf"\bottomrule\noalign{{\vskip{room}pt}}",
        r"\endlastfoot",
        *layout.rows,
        r"\end{longtable}",
        rf"\nopagebreak\vskip-{room}pt",
        r"\noindent{\footnotesize\raggedright\interlinepenalty=10000",
        f"{footnote}.",
        r"\par}",
        r"\endgroup",
    ]


def _without_orbit_weights(page: Sheet) -> Sheet:
    if not {"w", "W"} <= set(page.labels):
        return page
    entries = tuple(Entry(e.lead, tuple(pair for pair in e.numbers if pair[0] != "W")) for e in page.entries)
    labels = tuple(name for name in page.labels if name != "W")
    return Sheet(page.by_orbits, page.head, labels, entries, page.legend.replace(TOGETHER, ""))


def _caption(rule: Rule, page: Sheet, said: dict[str, Fact], *, example: bool) -> str:
    orbits = f" in {counted(len(rule.orbits), 'orbit')}" if page.by_orbits and rule.space == "all" else ""
    kind = special_of(rule, functions=False)
    legend = page.legend
    if example and page.by_orbits and rule.space == "all":
        legend += f" {expansion(rule)}"
    for name, symbol in (("w", "w"), ("W", "W"), ("w2", "w_2")):
        legend = legend.replace(f" {name} is ", f" ${symbol}$ is ").replace(f"; {name} is", f"; ${symbol}$ is")
    return (
        f"{tex.prose(measure_name(rule.measure))}: {counted(len(rule), noun(rule))}{orbits}, "
        f"{kind}{', ' if kind else ''}"
        f"exact for {said['exact for'].tex}. Density {said['density'].tex}, of total mass~1; weights sum to~1. "
        f"Numbers are rounded to {rule.digits} significant digits. {_formulas(legend)}"
    )


def expansion(rule: Rule) -> str:
    """A sentence that shows, on the smallest orbit with different nodes, how a pattern is expanded."""
    orbit = min((o for o in rule.orbits if len(o.values) > 1), key=lambda o: len(o.values), default=None)
    if orbit is None or sum(orbit.multiplicities) > 4:
        return ""
    word = "".join(letter * m for letter, m in zip("abcd", orbit.multiplicities, strict=False))
    orders = dict.fromkeys("".join(word[(i + k) % len(word)] for i in range(len(word))) for k in range(len(word)))
    if len(orbit.values) > 2 or min(orbit.multiplicities) > 1:
        return ""
    shown = ", ".join("$(" + ",".join(order) + ")$" for order in sorted(orders))
    spaced = r"\,".join(word)
    return f"Pattern ${spaced}$ stands for {shown}."


def _formulas(text: str) -> str:
    """Prose whose dollar signs already enclose formulas."""
    pieces = text.split("$")
    return "".join(f"${piece}$" if k % 2 else tex.prose(piece) for k, piece in enumerate(pieces))


def _wide(page: Sheet, width: float) -> Layout | None:
    """One line per entry, in the largest size in which it fits; None where it fits in none."""
    for size in tex.SIZES:
        columns = [*(max(size.words(x) for x in column) for column in _leads(page)), *_number_widths(page, size)]
        if sum(columns) + _GAP * (len(columns) - 1) <= width:
            break
    else:
        return None
    types = "".join("l" if name == "pattern" else "r" for name in page.head) + "l" * len(page.labels)
    head = " & ".join((*page.head, *(tex.label(name) for name in page.labels))) + r" \\"
    rows = []
    for entry in page.entries:
        numbers = dict(entry.numbers)
        cells = [tex.number(numbers[name], 10**6)[0] if name in numbers else "" for name in page.labels]
        lead = [tex.pattern(x) if name == "pattern" else x for name, x in zip(page.head, entry.lead, strict=True)]
        rows.append(" & ".join((*lead, *cells)) + r" \\")
    return Layout(size, types, head, rows)


def _leads(page: Sheet) -> list[tuple[str, ...]]:
    return list(zip(page.head, *(entry.lead for entry in page.entries), strict=True))


def _number_widths(page: Sheet, size: tex.Size) -> list[float]:
    return [
        max((size.number(x) for entry in page.entries for name, x in entry.numbers if name == label), default=0.0)
        for label in page.labels
    ]


def _tall(page: Sheet, width: float) -> Layout:
    """One line per number; the pattern and its number of nodes stand beside the first two."""
    beside = [_beside(page, entry) for entry in page.entries]
    leads = [(tex.pattern(these[0]), *these[1:]) if these else () for these in beside]
    for size in tex.SIZES:
        left = [
            size.words(page.head[0]),
            *([max(size.words(x) for these in beside for x in these)] if beside[0] else []),
        ]
        room = width - sum(left) - size.words("mm") - _GAP * (len(left) + 1)
        if max(_number_widths(page, size)) <= room:
            break
    places = size.digits_within(room)
    rows = []
    for k, (entry, lead) in enumerate(zip(page.entries, leads, strict=True)):
        if k:
            rows.append(r"\addlinespace[3pt]")
        lines: list[tuple[str, str]] = []
        for name, decimal in entry.numbers:
            fits = size.number(decimal) <= room
            pieces = tex.number(decimal, 10**6 if fits else places)
            lines += [(tex.label(name) if not j else "", piece) for j, piece in enumerate(pieces)]
        together = len(lines) <= _LONGEST_BLOCK
        for j, (name, piece) in enumerate(lines):
            first = [entry.lead[0] if not j else ""]
            if leads[0]:
                first.append(lead[j] if j < len(lead) else "")
            rows.append(" & ".join((*first, name, piece)) + (r" \\*" if together and j < len(lines) - 1 else r" \\"))
    types = "rlll" if leads[0] else "rll"
    names = [page.head[0], *(["pattern"] if beside[0] else [])]
    head = " & ".join((*names, r"\multicolumn{2}{l@{}}{values and weight}")) + r" \\"
    return Layout(size, types, head, rows)


def _beside(page: Sheet, entry: Entry) -> Sequence[str]:
    if not page.by_orbits:
        return ()
    _, nodes, pattern = entry.lead
    return pattern, *([counted(int(nodes), "node")] if "w" in page.labels else [])


def _footnote(rule: Rule, said: dict[str, Fact], cited: Mapping[Source, int]) -> str:
    behind = {
        label: ", ".join(str(k) for k in sorted(cited[s] for s in these if s in cited))
        for label, these in sources(rule).items()
    }
    marks = {label: f" [{numbers}]" for label, numbers in behind.items() if numbers}
    shown = [fact for label, fact in said.items() if label not in _SAID_BEFORE]
    parts = [rf"\emph{{{fact.label}}}: {fact.tex}{marks.get(fact.label, '')}" for fact in shown]
    if "density" in marks:
        parts.append(rf"\emph{{density}}:{marks['density']}")
    return ";\n".join(parts)
