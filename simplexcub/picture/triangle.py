"""N = 3: the triangle, with the density as shading and contours, and the nodes.

Rules of ordered spectra are drawn on the chamber λ_1 ≥ λ_2 ≥ λ_3, a triangle of its own, stretched to equal sides.
"""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.tri import Triangulation

from simplexcub.measures import Measure
from simplexcub.picture import style
from simplexcub.picture.density import density
from simplexcub.picture.marks import put
from simplexcub.picture.orbits import chamber_coordinates, chamber_points, node_orbits, on_chamber
from simplexcub.picture.style import FloatArray
from simplexcub.picture.title import areas_note, legend, title
from simplexcub.rule import Rule

SIZE = (style.COLUMN, 3.6)
CORNERS = np.array([[0.5, np.sqrt(0.75)], [0.0, 0.0], [1.0, 0.0]])
_FINE = 110
_LEVELS = len(style.SHADES) - 1
_CHAMBER = (r"$(1,0,0)$", r"$(\frac{1}{2},\frac{1}{2},0)$", r"$(\frac{1}{3},\frac{1}{3},\frac{1}{3})$")


def paint(figure: Figure, rule: Rule) -> None:
    """The triangle with everything on it."""
    chamber = on_chamber(rule)
    orbits = node_orbits(rule)
    named = 1 < len(orbits) <= style.MOST_IN_LEGEND
    style.heading(figure, title(rule), areas_note(rule))
    bottom = 0.18 if named else 0.08
    axes = figure.add_axes((0.02, bottom, 0.96, 0.94 - bottom))
    style.bare(axes)
    axes.set_xlim(-0.12, 1.12)
    axes.set_ylim(-0.1, 0.95)
    shade(axes, rule.measure, chamber=chamber)
    outline(axes, _CHAMBER if chamber else tuple(rf"$\lambda_{i}=1$" for i in (1, 2, 3)))
    if not chamber:
        ticks(axes)
    places = chamber_coordinates(rule.nodes) if chamber else rule.nodes
    side = 72 * SIZE[1] * (0.94 - bottom) / 1.05
    scale = style.area_per_weight(rule.weights, side**2 * np.sqrt(3) / 4)
    put(axes, places @ CORNERS, rule.weights, orbits, scale)
    legend(figure, orbits, loc="lower left", anchor=(0.0, 0.05))


def shade(axes: Axes, measure: Measure, *, chamber: bool) -> None:
    """The density in a few pale steps with hairlines between them; unbounded ones are cut off."""
    f = density(measure)
    if f is None:
        return
    steps = [(i, j, _FINE - i - j) for i in range(_FINE + 1) for j in range(_FINE + 1 - i)]
    grid = np.array(steps) / _FINE
    inside = (grid + 1e-3) / (1 + 3e-3)  # the border itself may be infinite
    values = f(chamber_points(inside) if chamber else inside)
    x, y = (grid @ CORNERS).T
    top = float(np.quantile(values, 0.97))
    if np.ptp(values) < 1e-9 * top:
        axes.fill(*CORNERS.T, color=style.SHADES[1], linewidth=0, zorder=0)
        return
    triangles = Triangulation(x, y)
    levels = np.linspace(0.0, top, _LEVELS + 1)
    axes.tricontourf(triangles, np.minimum(values, top * 1.0001), levels, colors=style.SHADES, extend="max", zorder=0)
    axes.tricontour(triangles, values, levels[1:], colors=style.GREY, linewidths=0.25, zorder=0.5)


def outline(axes: Axes, names: tuple[str, ...], *, size: float = style.TEXT, gap: float = 0.035) -> None:
    """The sides, and the names of the corners."""
    axes.fill(*CORNERS.T, fill=False, edgecolor=style.INK, linewidth=0.8, zorder=2)
    top, left, right = names
    axes.text(0.5, CORNERS[0, 1] + gap, top, ha="center", va="bottom", fontsize=size)
    axes.text(0.0, -gap, left, ha="center", va="top", fontsize=size)
    axes.text(1.0, -gap, right, ha="center", va="top", fontsize=size)


def ticks(axes: Axes) -> None:
    """Where λ_i is 0.2, 0.4, … on the side that leads to the corner λ_i = 1, with a hairline through the triangle."""
    centre = CORNERS.mean(axis=0)
    for i in range(3):
        foot, other = CORNERS[(i + 2) % 3], CORNERS[(i + 1) % 3]
        for level in (0.2, 0.4, 0.6, 0.8):
            at, across = (level * CORNERS[i] + (1 - level) * end for end in (foot, other))
            axes.plot(*np.stack([at, across]).T, color=style.PAPER, linewidth=0.4, zorder=1)
            outward = _away(at, foot, CORNERS[i], centre)
            axes.plot(*np.stack([at, at + 0.012 * outward]).T, color=style.INK, linewidth=0.5, zorder=2, clip_on=False)
            x, y = at + 0.055 * outward
            axes.text(x, y, f"{level:.1f}", ha="center", va="center", fontsize=style.SMALL, color=style.GREY)


def _away(at: FloatArray, start: FloatArray, end: FloatArray, centre: FloatArray) -> FloatArray:
    """Unit vector at right angles to a side, pointing outwards."""
    along = (end - start) / np.linalg.norm(end - start)
    normal = np.array([along[1], -along[0]])
    outward: FloatArray = normal if normal @ (at - centre) > 0 else -normal
    return outward
