"""The readable table: a heading, the facts, then the numbers in aligned columns, in blocks of ten digits where long."""

from __future__ import annotations

import textwrap
from collections.abc import Iterator

from simplexcub.rule import Rule
from simplexcub.table.describe import facts, heading
from simplexcub.table.sheet import Sheet, groups, sheet

MARK = "simplexcub rule"
_WIDTH = 96
_LABEL = 16
_BLOCKS_IN_LINE = 6
_GAP = "   "
NONE = "–"


def export(rule: Rule) -> str:
    """The rule as a readable table."""
    title = f"{MARK}   {heading(rule)}"
    lines = [title, "━" * len(title), ""]
    for fact in facts(rule):
        if fact.label in ("space", "degree"):
            continue  # said by "exact for"
        wrapped = textwrap.wrap(fact.text, _WIDTH - _LABEL, break_long_words=False, break_on_hyphens=False) or [""]
        lines += [f"  {label:<{_LABEL - 2}}{part}" for label, part in zip(_first(fact.label), wrapped, strict=False)]
    page = sheet(rule)
    lines += ["", *textwrap.wrap(page.legend, _WIDTH), "", *_numbers(page)]
    return "\n".join(line.rstrip() for line in lines) + "\n"


def _first(label: str) -> Iterator[str]:
    """`label`, then blanks for the lines that continue it."""
    yield label
    while True:
        yield ""


def _numbers(page: Sheet) -> list[str]:
    widths = page.widths
    one_line = sum(widths) + len(_GAP) * len(widths) <= _WIDTH
    if one_line:
        rows: list[tuple[str, ...]] = [(*page.head, *page.labels)]
        for entry in page.entries:
            numbers = dict(entry.numbers)
            rows.append((*entry.lead, *(numbers.get(label, NONE) for label in page.labels)))
    else:
        rows = [(*page.head, "", "value")]
        blank = ("",) * len(page.head)
        for entry in page.entries:
            lead = entry.lead
            for label, decimal in entry.numbers:
                blocks = groups(decimal)
                for i in range(0, len(blocks), _BLOCKS_IN_LINE):
                    indent = " " * (blocks[0].index(".") + 1) if i else ""
                    rows.append((*lead, label if not i else "", indent + " ".join(blocks[i : i + _BLOCKS_IN_LINE])))
                    lead = blank
    columns = list(zip(*rows, strict=True))
    sizes = [max(len(cell) for cell in column) for column in columns]
    # Counts end flush, everything else starts flush.
    counts = {k for k, name in enumerate(page.head) if name != "pattern"}
    lines = [
        " " + _GAP.join(cell.rjust(sizes[k]) if k in counts else cell.ljust(sizes[k]) for k, cell in enumerate(row))
        for row in rows
    ]
    rule_below = " " + _GAP.join("─" * n for n in sizes)
    return [lines[0], rule_below, *lines[1:]]
