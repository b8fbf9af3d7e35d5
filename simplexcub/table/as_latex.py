r"""A LaTeX fragment for a plain article that loads booktabs and longtable.

One longtable, with repeated headings, then the verification in small type. Numbers are set in blocks of five digits and
broken after sixty, which is what the text width of the article class holds; where whole entries fit into a line they
get one line each.
"""

from __future__ import annotations

import re

from simplexcub.rule import Rule
from simplexcub.table.describe import Fact, counted, escape, facts, heading
from simplexcub.table.sheet import Entry, Sheet, sheet

MARK = "simplexcub rule"
PACKAGES = ("booktabs", "longtable")
_LINE = 60  # digits of a number in one line
_BLOCK = 5
_CHARACTERS = 56  # of a line with several columns
_LEFT_OUT = ("measure", "density", "exact for", "space", "degree")  # said by the caption


def export(rule: Rule) -> str:
    """The rule as a LaTeX fragment."""
    page = sheet(rule)
    said = {fact.label: fact for fact in facts(rule)}
    one_line = sum(page.widths) + 3 * len(page.widths) <= _CHARACTERS
    columns, head, body = _wide(page) if one_line else _tall(page)
    across = len(columns)
    lines = [
        f"% {MARK}: {heading(rule)}",
        f"% In the preamble: \\usepackage{{{','.join(PACKAGES)}}}",
        r"\begingroup\small",
        r"\setlength{\LTcapwidth}{\textwidth}",
        rf"\begin{{longtable}}{{@{{}}{columns}@{{}}}}",
        rf"\caption{{{_caption(rule, page, said)}}}\\",
        r"\toprule",
        head,
        r"\midrule",
        r"\endfirsthead",
        rf"\multicolumn{{{across}}}{{@{{}}l@{{}}}}{{\emph{{continued}}}}\\",
        r"\toprule",
        head,
        r"\midrule",
        r"\endhead",
        rf"\midrule\multicolumn{{{across}}}{{r@{{}}}}{{\emph{{continues}}}}\\",
        r"\endfoot",
        r"\bottomrule",
        r"\endlastfoot",
        *body,
        r"\end{longtable}",
        *_footnote(said),
        r"\endgroup",
    ]
    return "\n".join(lines) + "\n"


def _caption(rule: Rule, page: Sheet, said: dict[str, Fact]) -> str:
    orbits = f" in {counted(len(rule.orbits), 'orbit')}" if page.by_orbits and rule.space == "all" else ""
    rule_in_words = f"{counted(len(rule), 'node')}{orbits}, exact for {said['exact for'].tex}"
    legend = re.sub(r"\bw2\b", "$w_2$", re.sub(r"\b([wW])\b", r"$\1$", _symbols(page.legend)))
    return (
        f"{escape(heading(rule).split(', degree')[0])}: {rule_in_words}. "
        f"Density {said['density'].tex}, of total mass 1; weights sum to 1. {legend}"
    )


def _symbols(text: str) -> str:
    pieces = re.split(r"λ([0-9]+)", text)
    return "".join(rf"$\lambda_{{{piece}}}$" if k % 2 else escape(piece) for k, piece in enumerate(pieces))


def _wide(page: Sheet) -> tuple[str, str, list[str]]:
    """One line per entry: column types, heading and rows."""
    types = "".join("l" if name == "pattern" else "r" for name in page.head) + "l" * len(page.labels)
    head = " & ".join((*page.head, *(_label(label) for label in page.labels))) + r" \\"
    rows = []
    for entry in page.entries:
        numbers = dict(entry.numbers)
        cells = [_number(numbers[label])[0] if label in numbers else "" for label in page.labels]
        rows.append(" & ".join((*_lead(page, entry), *cells)) + r" \\")
    return types, head, rows


def _tall(page: Sheet) -> tuple[str, str, list[str]]:
    """A line that names the entry, then one line for each number: column types, heading and rows."""
    rows = []
    for k, entry in enumerate(page.entries):
        if k:
            rows.append(r"\addlinespace")
        name = " ".join(_title(page, entry))
        rows.append(rf"\multicolumn{{2}}{{@{{}}l@{{}}}}{{{name}}} \\*")
        for i, (label, decimal) in enumerate(entry.numbers):
            last_number = i == len(entry.numbers) - 1
            pieces = _number(decimal)
            for j, piece in enumerate(pieces):
                end = r" \\" if last_number and j == len(pieces) - 1 else r" \\*"
                rows.append(f"{'' if j else _label(label)} & {piece}{end}")
    what = "orbit: pattern, nodes" if page.by_orbits else "node"
    return "ll", rf"\multicolumn{{2}}{{@{{}}l@{{}}}}{{{what}}} \\", rows


def _title(page: Sheet, entry: Entry) -> list[str]:
    lead = _lead(page, entry)
    if not page.by_orbits:
        return [f"{lead[0]}"]
    number, nodes, pattern = lead
    return [f"{number}:", f"{pattern},", counted(int(nodes), "node")]


def _lead(page: Sheet, entry: Entry) -> tuple[str, ...]:
    if not page.by_orbits:
        return entry.lead
    *first, pattern = entry.lead
    words = re.sub(r"×([0-9]+)", r"{\\times}\1", re.sub(r"([a-z])([0-9]+)(?=×| |$)", r"\1_{\2}", pattern))
    spaced = words.replace(" ", r"\,")
    return (*first, f"${spaced}$")


def _label(label: str) -> str:
    if label.startswith("λ"):
        return rf"$\lambda_{{{label[1:]}}}$"
    return f"${label[0]}_{{{label[1:]}}}$" if label[1:] else f"${label}$"


def _number(decimal: str) -> list[str]:
    """A decimal as one or more lines of LaTeX, with a thin space after every five places."""
    whole, point, places = decimal.partition(".")
    if not point or not places.isdigit():
        return [rf"$\mathtt{{{decimal}}}$" if not decimal.lstrip("-").isdigit() else f"${decimal}$"]
    lines = []
    for start in range(0, len(places), _LINE):
        part = places[start : start + _LINE]
        blocks = r"\,".join(part[i : i + _BLOCK] for i in range(0, len(part), _BLOCK))
        lines.append(f"${blocks}$" if start else f"${whole}.{blocks}$")
    # Continued lines stand under the first place.
    return [lines[0], *(rf"\phantom{{${whole}.$}}{line}" for line in lines[1:])]


def _footnote(said: dict[str, Fact]) -> list[str]:
    parts = [rf"\emph{{{fact.label}}}: {fact.tex}" for label, fact in said.items() if label not in _LEFT_OUT]
    text = ";\n".join(parts)
    return [r"\par\noindent{\footnotesize\raggedright", f"{text}.", r"\par}"]
