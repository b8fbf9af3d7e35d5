"""N = 4: the tetrahedron in parallel projection, far things paler, and the nodes projected on each of its faces.

A node is projected on the face λ_i = 0 at right angles, which shares λ_i equally among the other components. Rules of
ordered spectra are drawn on the chamber λ_1 ≥ … ≥ λ_4, a tetrahedron of its own, stretched to equal edges.
"""

from __future__ import annotations

from itertools import combinations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from simplexcub.picture import style
from simplexcub.picture.marks import put
from simplexcub.picture.orbits import chamber_coordinates, node_orbits, on_chamber
from simplexcub.picture.style import FloatArray
from simplexcub.picture.title import areas_note, legend, title
from simplexcub.picture.triangle import CORNERS, outline
from simplexcub.rule import Rule

SIZE = (style.PAGE, 3.5)
_SOLID = np.array(
    [
        [0.0, 0.0, np.sqrt(2 / 3)],
        *([np.cos(a) / np.sqrt(3), np.sin(a) / np.sqrt(3), 0.0] for a in np.radians([210, 330, 90])),
    ]
)
_TURN, _TILT = np.radians(-42.0), np.radians(17.0)
_SMALLER = 0.42  # side of a face in the side panel, as a share of an edge in the main one, for the marks
_CHAMBER = (
    r"$(1,0,0,0)$",
    r"$(\frac{1}{2},\frac{1}{2},0,0)$",
    r"$(\frac{1}{3},\frac{1}{3},\frac{1}{3},0)$",
    r"$(\frac{1}{4},\frac{1}{4},\frac{1}{4},\frac{1}{4})$",
)


def paint(figure: Figure, rule: Rule) -> None:
    """The solid on the left, its four faces on the right."""
    chamber = on_chamber(rule)
    orbits = node_orbits(rule)
    places = chamber_coordinates(rule.nodes) if chamber else rule.nodes
    style.heading(figure, title(rule), f"fainter: farther away\n{areas_note(rule)}")
    solid = figure.add_axes((0.02, 0.1, 0.5, 0.82))
    names = _CHAMBER if chamber else tuple(rf"$\lambda_{i}=1$" for i in (1, 2, 3, 4))
    flat, depth = projected(np.eye(4))
    style.bare(solid)
    _edges(solid, flat, depth)
    middle = flat.mean(axis=0)
    for corner, name in zip(flat, names, strict=True):
        away = (corner - middle) / np.linalg.norm(corner - middle)
        x, y = corner + away * ((0.15, 0.075) if chamber else (0.09, 0.075))
        solid.text(x, y, name, ha="center", va="center", fontsize=style.TEXT)
    solid.set_xlim(flat[:, 0].min() - 0.17, flat[:, 0].max() + 0.17)
    solid.set_ylim(flat[:, 1].min() - 0.1, flat[:, 1].max() + 0.1)
    scale = style.area_per_weight(rule.weights, (72 * 0.4 * SIZE[0]) ** 2 / 2)
    points, far = projected(places)
    put(solid, points, rule.weights, orbits, scale, depth=far)
    for k in range(4):
        _face(figure, rule, places, k, chamber=chamber, scale=scale * _SMALLER**1.5)
    legend(figure, orbits, loc="lower right", anchor=(0.99, 0.0))


def projected(places: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Barycentric points, shape (M, 4), as seen: positions (M, 2), and depth from 0, near, to 1, far.

    Examples
    --------
    >>> flat, depth = projected(np.eye(4))
    >>> bool(depth.min() == 0 and depth.max() == 1)
    True
    """
    turn = np.array([[np.cos(_TURN), -np.sin(_TURN), 0], [np.sin(_TURN), np.cos(_TURN), 0], [0, 0, 1]])
    tilt = np.array([[1, 0, 0], [0, np.cos(_TILT), -np.sin(_TILT)], [0, np.sin(_TILT), np.cos(_TILT)]])
    corners = _SOLID @ (tilt @ turn).T
    seen = places @ corners
    near, far = corners[:, 1].min(), corners[:, 1].max()
    return seen[:, [0, 2]], (seen[:, 1] - near) / (far - near)


def hidden(flat: FloatArray) -> list[tuple[int, int]]:
    """The edge that lies behind the solid: of two edges that cross as seen, the farther one; none if no two cross."""
    _, depth = projected(np.eye(4))
    for edge in combinations(range(4), 2):
        a, b = edge
        c, d = (k for k in range(4) if k not in edge)
        # Where the lines ab and cd cross: shares s and t along each.
        system = np.stack([flat[b] - flat[a], flat[c] - flat[d]], axis=1)
        s, t = np.linalg.solve(system, flat[c] - flat[a])
        if 0 < s < 1 and 0 < t < 1:
            here = depth[a] + s * (depth[b] - depth[a])
            there = depth[c] + t * (depth[d] - depth[c])
            return [edge] if here > there else [(c, d)]
    return []


def _edges(axes: Axes, flat: FloatArray, depth: FloatArray) -> None:
    behind = hidden(flat)
    for a, b in combinations(range(4), 2):
        away = 0.6 * float(depth[a] + depth[b]) / 2
        line = (0, (4, 3)) if (a, b) in behind else "solid"
        width = 0.7 if (a, b) in behind else 1.2 - 0.5 * float(depth[a] + depth[b]) / 2
        colour = style.blend(style.INK, away)
        axes.plot(*flat[[a, b]].T, color=colour, linewidth=width, linestyle=line, zorder=1, solid_capstyle="round")


def _face(figure: Figure, rule: Rule, places: FloatArray, k: int, *, chamber: bool, scale: float) -> None:
    column, row = k % 2, k // 2
    axes = figure.add_axes((0.55 + 0.225 * column, 0.56 - 0.38 * row, 0.2, 0.34))
    style.bare(axes)
    rest = [i for i in range(4) if i != k]
    axes.fill(*CORNERS.T, color=style.SHADES[0], linewidth=0, zorder=0)
    letter = "v" if chamber else r"\lambda"
    outline(axes, tuple(f"${letter}_{i + 1}$" for i in rest), size=style.SMALL, gap=0.05)
    axes.set_xlim(-0.1, 1.1)
    axes.set_ylim(-0.12, 1.0)
    on_face = places[:, rest] + places[:, [k]] / 3
    put(axes, on_face @ CORNERS, rule.weights, node_orbits(rule), scale, depth=places[:, k])
