"""The words on a picture."""

from __future__ import annotations

from collections.abc import Sequence

from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from simplexcub.picture import style
from simplexcub.picture.orbits import Group
from simplexcub.rule import Rule
from simplexcub.table.describe import counted, measure_name

_LONGEST = 60
_KEY_AREA = 18.0  # square points of a mark in a legend


def plain(text: str) -> str:
    """Text that no picture takes for a formula."""
    return text.replace("$", r"\$")


def title(rule: Rule) -> str:
    """What is drawn, in one line, or in two if it is long."""
    name = measure_name(rule.measure)
    what = f"degree {rule.degree}, {counted(len(rule), 'node')}"
    name = name if len(name) <= _LONGEST else f"{name[: _LONGEST - 1]}…"
    gap = ", " if len(name) + len(what) <= _LONGEST else "\n"
    return plain(f"{name}{gap}{what}")


def areas_note(rule: Rule, *, stems: bool = False) -> str:
    """How weights are drawn."""
    how = "lengths of stems are weights" if stems else "areas are proportional to weights"
    hollow = "; crossed nodes have negative weights" if min(rule.weights) < 0 and not stems else ""
    where = {"symmetric": "one ordered spectrum for each orbit; ", "ordered": "ordered spectra; "}.get(rule.space, "")
    return f"{where}{how}{hollow}"


def weight_text(weight: float) -> str:
    """A weight to three places, or to one digit where these show nothing."""
    return f"{weight:.3f}" if abs(weight) >= 0.0005 else f"{weight:.0e}"


def legend(figure: Figure, orbits: Sequence[Group], *, loc: str, anchor: tuple[float, float]) -> None:
    """Name the orbits, in up to three columns, unless there is only one or there are too many."""
    if not 1 < len(orbits) <= style.MOST_IN_LEGEND:
        return
    names = [f"{orbit.name}, $W={weight_text(orbit.weight)}$" for orbit in orbits]
    handles = []
    for k in range(len(orbits)):
        shape, colour = style.mark(k)
        size = (_KEY_AREA / style.unit_area(shape)) ** 0.5
        handles.append(
            Line2D([], [], linestyle="", marker=shape, markersize=size, color=colour, markeredgecolor=style.INK)
        )
        handles[-1].set_markeredgewidth(0.6)
    figure.legend(
        handles,
        names,
        loc=loc,
        bbox_to_anchor=anchor,
        ncols=min(3, len(orbits)),
        fontsize=style.SMALL,
        frameon=False,
        handletextpad=0.3,
        labelspacing=0.25,
        columnspacing=1.0,
        borderaxespad=0.2,
    )
