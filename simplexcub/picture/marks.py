"""Nodes as marks whose areas are proportional to the weights, orbits told apart by shape and colour."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes

from simplexcub.picture import style
from simplexcub.picture.orbits import Group
from simplexcub.picture.style import FloatArray

_FARTHEST = 0.65  # how far the colour of the farthest node is moved towards paper


def put(
    axes: Axes,
    points: FloatArray,
    weights: FloatArray,
    orbits: Sequence[Group],
    scale: float,
    *,
    depth: FloatArray | None = None,
) -> None:
    """Draw nodes.

    Parameters
    ----------
    axes : Axes
    points : ndarray, shape (M, 2)
    weights : ndarray, shape (M,)
        A mark has the area `scale` · \\|weight|; a negative one is crossed out.
    orbits : sequence of Group
    scale : float
        Square points per unit of weight.
    depth : ndarray, shape (M,), optional
        From 0, near, to 1, far: far nodes are paler and lie below near ones. Without it small marks lie on large ones.
    """
    owner = {i: k for k, orbit in enumerate(orbits) for i in orbit.nodes}
    below_first = np.argsort(-np.abs(weights) if depth is None else -depth, kind="stable")
    for place, i in enumerate(below_first):
        k = owner[int(i)]
        shape, colour = style.mark(k)
        away = 0.0 if depth is None else _FARTHEST * float(depth[i])
        area = scale * abs(float(weights[i]))
        x, y = points[i]
        axes.scatter(
            x,
            y,
            s=area / style.unit_area(shape),
            marker=shape,
            c=[style.blend(colour if weights[i] >= 0 else style.PAPER, away)],
            edgecolors=[style.blend(style.INK, away)],
            linewidths=0.6,
            zorder=3 + place / len(weights),
            clip_on=False,
        )
        if weights[i] < 0:
            axes.scatter(x, y, s=area, marker="x", c=style.INK, linewidths=0.6, zorder=3 + place / len(weights))
