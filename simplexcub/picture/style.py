"""The look of all pictures: type, ink, marks, and bytes that depend on nothing but the picture.

Sizes are those of print: figures are as wide as one column (86 mm) or two (176 mm), and type has 7 or 8 points. Orbits
are told apart by shape and by colour; the colours also differ in lightness and to the colour-blind, so that a picture
survives a printer without colours. The area of a mark is proportional to the weight whatever its shape.
"""

from __future__ import annotations

import io
from collections.abc import Callable
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.markers import MarkerStyle
from matplotlib.path import Path
from matplotlib.transforms import Affine2D
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
COLUMN, PAGE = 86 / 25.4, 176 / 25.4  # inches
INK, GREY, MIST, PAPER = "#1d2433", "#6d7787", "#dfe5ea", "#ffffff"
SHADES = ("#f4f6f8", "#e6ebef", "#d7dfe6", "#c7d2dc", "#b6c4d1", "#a4b6c6")
COLOURS = ("#1f3b5c", "#f0b429", "#b5432a", "#8fc1b5", "#6b4c9a", "#ffffff")
SHAPES = ("o", "s", "^", "D", "v", "p")
SMALL, TEXT = 7.0, 8.0
LARGEST_AREA = 110.0  # square points of a mark
MOST_COVERED = 0.10  # share of the picture under marks
MOST_IN_LEGEND = 9
SALT = "simplexcub"
_SETTINGS = {
    "font.family": "serif",
    "font.serif": ["STIXGeneral"],
    "mathtext.fontset": "stix",
    "font.size": TEXT,
    "axes.linewidth": 0.6,
    "axes.edgecolor": INK,
    "axes.labelcolor": INK,
    "axes.labelsize": TEXT,
    "text.color": INK,
    "xtick.color": INK,
    "ytick.color": INK,
    "xtick.labelsize": SMALL,
    "ytick.labelsize": SMALL,
    "xtick.major.width": 0.5,
    "ytick.major.width": 0.5,
    "xtick.minor.width": 0.3,
    "ytick.minor.width": 0.3,
    "xtick.direction": "out",
    "ytick.direction": "out",
    "svg.hashsalt": SALT,
    "svg.fonttype": "path",
    "pdf.fonttype": 42,
    "hatch.linewidth": 0.5,
}
_SILENT: dict[str, dict[str, Any]] = {
    "svg": {"Date": None, "Creator": SALT},
    "pdf": {"CreationDate": None, "Creator": SALT, "Producer": SALT},
    "png": {"Software": SALT},
}


def drawn(width: float, height: float, kind: str, paint: Callable[[Figure], None], *, dpi: int = 300) -> bytes:
    """The bytes of a figure of the given size in inches; `paint` puts the picture on it."""
    with mpl.rc_context(_SETTINGS):
        figure = Figure(figsize=(width, height), facecolor=PAPER)
        FigureCanvasAgg(figure)
        paint(figure)
        content = io.BytesIO()
        figure.savefig(content, format=kind, dpi=dpi, metadata=_SILENT[kind])
    return content.getvalue()


def heading(figure: Figure, text: str, note: str = "") -> None:
    """A line of text at the top left, and a note at the bottom left."""
    _, height = figure.get_size_inches()
    figure.text(0.02, 1 - 0.05 / height, text, ha="left", va="top", fontsize=TEXT)
    if note:
        figure.text(0.02, 0.05 / height, note, ha="left", va="bottom", fontsize=SMALL, color=GREY)


def bare(axes: Axes) -> None:
    """Axes without frame and ticks, with equal scales."""
    axes.set_aspect("equal")
    axes.axis("off")


def mark(k: int) -> tuple[str, str]:
    """Shape and colour of the k-th orbit, all different for the first 36."""
    return SHAPES[k % len(SHAPES)], COLOURS[(k + k // len(SHAPES)) % len(COLOURS)]


def unit_area(shape: str) -> float:
    """Area of a shape's outline at marker size 1."""
    style = MarkerStyle(shape)
    total = 0.0
    for polygon in style.get_path().transformed(style.get_transform()).to_polygons():
        x, y = np.asarray(polygon).T
        total += abs(float(np.dot(x[:-1], y[1:]) - np.dot(x[1:], y[:-1]))) / 2
    return total


def outline(shape: str) -> Path:
    """A shape's outline around the origin with area 1."""
    style = MarkerStyle(shape)
    return style.get_path().transformed(style.get_transform()).transformed(Affine2D().scale(unit_area(shape) ** -0.5))


def area_per_weight(weights: FloatArray, room: float) -> float:
    """Square points per unit of weight, for a picture with `room` square points."""
    return min(MOST_COVERED * room / float(np.abs(weights).sum()), LARGEST_AREA / float(np.abs(weights).max()))


def blend(colour: str, share: float) -> tuple[float, float, float]:
    """A colour moved towards paper by `share`."""
    rgb = np.array(mpl.colors.to_rgb(colour))
    red, green, blue = rgb + share * (1 - rgb)
    return float(red), float(green), float(blue)
