"""Which picture a rule gets. The only module of this room that others load, and only when there is matplotlib."""

from __future__ import annotations

from collections.abc import Sequence

from simplexcub.errors import InputError
from simplexcub.picture import convergence, line, profile, style, tetrahedron, triangle
from simplexcub.picture.errors import Error
from simplexcub.rule import Rule

_PAINTERS = {2: line, 3: triangle, 4: tetrahedron}


def rule_picture(rule: Rule, kind: str, *, dpi: int) -> bytes:
    """The picture of a rule as the bytes of a file."""
    if rule.measure.N < 2:
        raise InputError("a picture must be of at least two components", rule.measure.N)
    painter = _PAINTERS.get(rule.measure.N, profile)
    width, height = painter.SIZE
    return style.drawn(width, height, kind, lambda figure: painter.paint(figure, rule), dpi=dpi)


def convergence_picture(errors: Sequence[Error], title: str, kind: str, *, spread: float) -> bytes:
    """The picture of errors against degree and nodes as the bytes of a file."""
    width, height = convergence.SIZE
    return style.drawn(width, height, kind, lambda figure: convergence.paint(figure, errors, title, spread=spread))
