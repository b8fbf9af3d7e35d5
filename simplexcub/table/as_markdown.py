"""A Markdown section: the facts as a list, the numbers as a table with every digit in code type."""

from __future__ import annotations

from collections.abc import Sequence

from simplexcub.rule import Rule
from simplexcub.table.describe import facts, heading
from simplexcub.table.sheet import Sheet, sheet

_MANY_DIGITS = 20
_SPECIAL = str.maketrans({c: f"\\{c}" for c in "\\`*_|<[]#"})


def export(rule: Rule) -> str:
    """The rule as Markdown text."""
    page = sheet(rule)
    lines = [f"## {heading(rule)}", ""]
    lines += [f"- **{fact.label}**: {fact.text.translate(_SPECIAL)}" for fact in facts(rule)]
    lines += ["", page.legend, "", *_table(page)]
    return "\n".join(lines) + "\n"


def export_several(rules: Sequence[Rule]) -> str:
    """Several rules, a section each."""
    return "\n".join(export(rule) for rule in rules)


def _table(page: Sheet) -> list[str]:
    columns = len(page.head)
    # Wide tables of long numbers cannot be read anywhere, so long numbers stand below each other.
    if max(page.widths[columns:]) <= _MANY_DIGITS:
        lines = _head((*page.head, *page.labels), columns)
        for entry in page.entries:
            numbers = dict(entry.numbers)
            cells = [f"`{numbers[label]}`" if label in numbers else "" for label in page.labels]
            lines.append(_row((*entry.lead, *cells)))
        return lines
    lines = _head((*page.head, "", "value"), columns)
    for entry in page.entries:
        lead = entry.lead
        for label, decimal in entry.numbers:
            lines.append(_row((*lead, label, f"`{decimal}`")))
            lead = ("",) * columns
    return lines


def _head(names: tuple[str, ...], flush_right: int) -> list[str]:
    rule = ("---:" if k < flush_right and name != "pattern" else ":---" for k, name in enumerate(names))
    return [_row(names), _row(tuple(rule))]


def _row(cells: tuple[str, ...]) -> str:
    return f"| {' | '.join(cells)} |"
