"""Nodes as marks whose areas are proportional to the weights, orbits told apart by shape and colour."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.collections import PathCollection
from matplotlib.transforms import IdentityTransform

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
    order = np.argsort(-np.abs(weights) if depth is None else -depth, kind="stable")
    away = np.zeros(len(weights)) if depth is None else _FARTHEST * depth
    looks = [style.mark(owner[int(i)]) for i in order]
    area = scale * np.abs(weights[order])
    axes.add_collection(
        PathCollection(
            [style.outline(shape) for shape, _ in looks],
            sizes=area,
            offsets=points[order],
            offset_transform=axes.transData,
            transform=IdentityTransform(),
            facecolors=[
                style.blend(colour if weights[i] >= 0 else style.PAPER, float(away[i]))
                for i, (_, colour) in zip(order, looks, strict=True)
            ],
            edgecolors=[style.blend(style.INK, float(away[i])) for i in order],
            linewidths=0.6,
            zorder=3,
            clip_on=False,
        ),
        autolim=False,
    )
    negative = order[weights[order] < 0]
    if negative.size:
        x, y = points[negative].T
        size = scale * np.abs(weights[negative])
        axes.scatter(x, y, s=size, marker="x", c=style.INK, linewidths=0.6, zorder=4, clip_on=False)
