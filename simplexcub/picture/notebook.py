"""A rule as HTML for a notebook: what it is, what was checked, its first numbers, its picture where one can be drawn.

Everything that came from a table is escaped. The picture is a data address, so that nothing in it can act on the page.
"""

from __future__ import annotations

from base64 import b64encode
from collections.abc import Iterator
from html import escape

from simplexcub.picture import available, encode
from simplexcub.rule import Rule
from simplexcub.table.describe import facts, heading
from simplexcub.table.rounding import rounded_text
from simplexcub.table.sheet import sheet

DIGITS = 8
_MOST_ROWS = 6
_SHOWN = ("status", "exact for", "checked", "lower bound", "efficiency", "proof")
_DOTS = 150  # an inch
_MOST_DRAWN = 500  # nodes; beyond it a picture takes longer than a cell should


def html(rule: Rule) -> str:
    """The rule as a fragment of HTML.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> from simplexcub.table import load
    >>> html(load(flat(2), degree=3)).startswith("<div><p><strong>Flat measure, N = 2, degree 3, 2 nodes")
    True
    """
    parts = [f"<p><strong>{escape(heading(rule))}</strong></p>", *_picture(rule), *_facts(rule), *_numbers(rule)]
    return f"<div>{''.join(parts)}</div>"


def _picture(rule: Rule) -> Iterator[str]:
    if available() and rule.measure.N >= 2 and len(rule) <= _MOST_DRAWN:
        data = b64encode(encode(rule, "png", dpi=_DOTS)).decode("ascii")
        alt = escape(f"Nodes of the rule: {heading(rule)}", quote=True)
        yield f'<img alt="{alt}" style="max-width:30em" src="data:image/png;base64,{data}">'


def _facts(rule: Rule) -> Iterator[str]:
    rows = [(fact.label, fact.text) for fact in facts(rule) if fact.label in _SHOWN]
    yield "<table>"
    for label, text in rows:
        left = ' style="text-align:left"'
        yield f"<tr><th{left}>{escape(label)}</th><td{left}>{escape(text)}</td></tr>"
    yield "</table>"


def _numbers(rule: Rule) -> Iterator[str]:
    """The first entries, with numbers cut to what a screen holds, and a line that says what was left out."""
    page = sheet(rule)
    digits = min(DIGITS, rule.digits)
    yield "<table><tr>" + "".join(f"<th>{escape(name)}</th>" for name in (*page.head, *page.labels)) + "</tr>"
    for entry in page.entries[:_MOST_ROWS]:
        numbers = dict(entry.numbers)
        cells = [rounded_text(numbers[label], digits) if label in numbers else "" for label in page.labels]
        yield "<tr>" + "".join(f"<td>{escape(cell)}</td>" for cell in (*entry.lead, *cells)) + "</tr>"
    yield "</table>"
    more = len(page.entries) - _MOST_ROWS
    left_out = f"; {more} more rows" if more > 0 else ""
    yield f"<p>{escape(page.legend)} Rounded to {digits} of {rule.digits} digits{left_out}.</p>"
