"""N = 2: the density stands on the line of λ_1, and the weights hang below it as stems."""

from __future__ import annotations

import numpy as np
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator

from simplexcub.picture import style
from simplexcub.picture.density import density, on_the_line
from simplexcub.picture.orbits import node_orbits, on_chamber
from simplexcub.picture.title import areas_note, title
from simplexcub.rule import Rule

SIZE = (style.COLUMN, 2.8)


def paint(figure: Figure, rule: Rule) -> None:
    """Density above, stems below, with one horizontal axis between them."""
    low = 0.5 if on_chamber(rule) else 0.0
    style.heading(figure, title(rule), areas_note(rule, stems=True))
    above = figure.add_axes((0.13, 0.55, 0.84, 0.36))
    below = figure.add_axes((0.13, 0.2, 0.84, 0.35))
    f = density(rule.measure)
    if f is not None:
        x, values = on_the_line(f, low)
        # An unbounded density is cut where it would hide the rest.
        top = min(float(values.max()), 4 * float(np.median(values)) + 1)
        above.fill_between(x, values, color=style.SHADES[2], linewidth=0)
        above.plot(x, values, color=style.INK, linewidth=0.8)
        above.set_ylim(0, 1.08 * top)
    above.set_ylabel("density")
    above.yaxis.set_major_locator(MaxNLocator(4, prune="lower"))
    above.tick_params(labelbottom=False, length=2)
    for axes in (above, below):
        axes.set_xlim(low - 0.02 * (1 - low), 1 + 0.02 * (1 - low))
        axes.spines["right"].set_visible(False)
        axes.spines["bottom" if axes is below else "top"].set_visible(False)
    below.spines["top"].set_linewidth(1.0)
    above.spines["bottom"].set_visible(False)
    above.tick_params(bottom=False)
    for k, orbit in enumerate(node_orbits(rule)):
        shape, colour = style.mark(k)
        for i in orbit.nodes:
            at, weight = rule.nodes[i, 0], rule.weights[i]
            below.plot([at, at], [0, weight], color=style.INK, linewidth=0.7, zorder=2)
        points = rule.nodes[orbit.nodes, 0], rule.weights[orbit.nodes]
        size = 14.0 / style.unit_area(shape)
        x, y = points
        below.scatter(x, y, s=size, marker=shape, c=colour, edgecolors=style.INK, linewidths=0.6, zorder=3)
    least, most = min(0.0, float(rule.weights.min())), max(0.0, float(rule.weights.max()))
    below.set_ylim(most + 0.14 * (most - least), least - (0.14 * (most - least) if least else 0))
    below.set_ylabel("weight")
    below.yaxis.set_major_locator(MaxNLocator(4, prune="lower"))
    below.tick_params(axis="x", top=True, labeltop=False, labelbottom=True, bottom=False, length=2)
    below.tick_params(axis="y", length=2)
    below.set_xlabel(r"$\lambda_1 = 1-\lambda_2$", labelpad=1)
