"""N ≥ 5: each node as a profile, its components sorted, largest first; lines are as thick as their weights."""

from __future__ import annotations

import numpy as np
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator

from simplexcub.picture import style
from simplexcub.picture.orbits import on_chamber, pattern_word, sorted_profiles
from simplexcub.picture.title import title, weight_text
from simplexcub.rule import Rule
from simplexcub.table.describe import counted

SIZE = (style.COLUMN, 2.9)
_THICKEST = 4.5
_THINNEST = 0.35
_INKS = ("#1f3b5c", "#e0a020", "#b5432a", "#8fc1b5", "#6b4c9a", "#9aa5b1")
_FEW = 12  # components that get a mark each


def paint(figure: Figure, rule: Rule) -> None:
    """One line per different profile, heaviest first."""
    profiles = sorted(sorted_profiles(rule), key=lambda item: -item[1])
    note = f"{counted(len(profiles), 'profile')}; lines are as thick as their weights"
    style.heading(figure, title(rule), note if on_chamber(rule) else f"nodes sorted: {note}")
    axes = figure.add_axes((0.12, 0.2, 0.85, 0.68))
    index = np.arange(1, rule.measure.N + 1)
    heaviest = max(abs(weight) for _, weight, _ in profiles)
    lines = []
    for k, (profile, weight, nodes) in enumerate(profiles):
        many = "" if nodes == 1 else f" ×{nodes}"
        shape, _ = style.mark(k)
        (line,) = axes.plot(
            index,
            profile,
            color=_INKS[k % len(_INKS)],
            linewidth=max(_THINNEST, _THICKEST * abs(weight) / heaviest),
            solid_capstyle="round",
            solid_joinstyle="round",
            marker=shape if rule.measure.N <= _FEW else "",
            markersize=4.0 / style.unit_area(shape) ** 0.5,
            markerfacecolor=style.PAPER,
            markeredgecolor=style.INK,
            markeredgewidth=0.6,
            zorder=2 + k / len(profiles),
            clip_on=False,
            label=f"{pattern_word(profile)}{many}, $W={weight_text(weight)}$",
        )
        lines.append(line)
    axes.set_xlabel("eigenvalue or component, from the largest", labelpad=1)
    axes.set_ylabel("value")
    axes.xaxis.set_major_locator(MaxNLocator(min(rule.measure.N, 10), integer=True))
    axes.tick_params(length=2)
    axes.set_ylim(bottom=min(0.0, float(rule.nodes.min())))
    level = 1 / rule.measure.N
    axes.axhline(level, color=style.GREY, linewidth=0.4, zorder=1)
    axes.annotate(
        "1/N",
        (1.0, level),
        (-2, 2),
        xycoords=("axes fraction", "data"),
        textcoords="offset points",
        ha="right",
        fontsize=style.SMALL,
        color=style.GREY,
    )
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)
    if len(lines) <= style.MOST_IN_LEGEND:
        axes.legend(handles=lines, fontsize=style.SMALL, frameon=False, loc="upper right", handlelength=2.2)
