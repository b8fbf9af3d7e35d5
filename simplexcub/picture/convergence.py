"""Errors of rules against their degree and against their number of nodes, beside the error of plain sampling."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from matplotlib.figure import Figure
from matplotlib.ticker import LogLocator, MaxNLocator, NullFormatter

from simplexcub.picture import style
from simplexcub.picture.errors import Error
from simplexcub.picture.title import plain

SIZE = (style.PAGE, 2.9)
_LEAST = 1e-17  # an error of zero is drawn here


def paint(figure: Figure, errors: Sequence[Error], title: str, *, spread: float) -> None:
    """Two panels with one vertical axis."""
    style.heading(figure, plain(title))
    left = figure.add_axes((0.085, 0.155, 0.42, 0.72))
    right = figure.add_axes((0.56, 0.155, 0.42, 0.72), sharey=left)
    sizes = np.maximum([e.error for e in errors], _LEAST)
    nodes = np.array([e.nodes for e in errors])
    look: dict[str, Any] = {
        "color": style.COLOURS[0],
        "linewidth": 1.0,
        "marker": "o",
        "markersize": 4.5,
        "markerfacecolor": style.COLOURS[1],
        "markeredgecolor": style.INK,
        "markeredgewidth": 0.6,
    }
    left.plot([e.degree for e in errors], sizes, **look)
    right.plot(nodes, sizes, label="rules", **look)
    if spread > 0:
        reach = np.array([nodes.min(), max(nodes.max(), 10 * nodes.min())])
        label = "sampling, one standard deviation"
        right.plot(reach, spread / np.sqrt(reach), color=style.GREY, linewidth=1.0, linestyle=(0, (5, 2)), label=label)
        right.legend(fontsize=style.SMALL, frameon=False, loc="lower right", bbox_to_anchor=(1, 1), ncols=2)
    left.set_yscale("log")
    right.set_xscale("log")
    left.set_ylabel("error of the mean")
    left.set_xlabel("degree", labelpad=1)
    right.set_xlabel("nodes", labelpad=1)
    left.xaxis.set_major_locator(MaxNLocator(8, integer=True))
    left.yaxis.set_major_locator(LogLocator(numticks=9))
    right.tick_params(labelleft=False)
    for axes in (left, right):
        axes.grid(visible=True, which="major", color=style.MIST, linewidth=0.5)
        axes.set_axisbelow(True)
        axes.tick_params(which="both", length=2)
        axes.yaxis.set_minor_formatter(NullFormatter())
        for side in ("top", "right"):
            axes.spines[side].set_visible(False)
