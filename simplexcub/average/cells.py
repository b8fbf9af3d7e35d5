"""Adaptive subdivision: the chart's cube is cut into boxes, whose images are cells of the chamber or the simplex.

On each box a flat rule and a poorer one embedded in it are applied to f times the exact density: Gauss–Kronrod 7/15 on
one axis, the rule of degree 7 with the embedded one of degree 5 on two or more. The boxes that make up most of the
error are halved, all of a generation in one call of f, along the axis of the largest fourth difference.

The mean c that was known before is taken off first, E[f] = c + E[f − c], so that a smooth density alone costs no cells.
The error is the sum over all cells of twice the difference of the two rules, and of what halving changed where that was
more than it should. Where f is smooth that is far too much; for a jump or kink across a cell it is of the right size.

References: A. C. Genz, A. A. Malik, J. Comput. Appl. Math. 6 (1980) 295; R. Piessens et al., *QUADPACK* (1983) for the
Kronrod nodes; J. Berntsen, T. O. Espelid, A. Genz, ACM TOMS 17 (1991) 437 for halving by fourth differences.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from itertools import combinations, product
from typing import Any

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
Values = Callable[[FloatArray], NDArray[Any]]
SHARE = 0.7  # of the error that one generation is to halve
MOST_CELLS = 4096  # halved at once
SAFETY = 2.0
CONFIRMATIONS = 1  # generations more once the error is small enough, lest two rules agreed by accident
ROUGH = 0.1  # change by halving over difference of the rules, above which a cell is not smooth
FIRST_CUTS = {1: 4, 2: 3, 3: 2}

# fmt: off
_KRONROD = np.array([0.991455371120812639206854697526329, 0.949107912342758524526189684047851,
                     0.864864423359769072789712788640926, 0.741531185599394439863864773280788,
                     0.586087235467691130294144691258340, 0.405845151377397166906606412076961,
                     0.207784955007898467600689403773245, 0.0])
_KRONROD_WEIGHTS = np.array([0.022935322010529224963732008058970, 0.063092092629978553290700663189204,
                             0.104790010322250183839876322541518, 0.140653259715525918745189590510238,
                             0.169004726639267902826583426598550, 0.190350578064785409913256402421014,
                             0.204432940075298892414161999234649, 0.209482141084727828012999174891714])
_GAUSS_WEIGHTS = np.array([0.129484966168869693270611432679082, 0.279705391489276667901467771423780,
                           0.381830050505118944950369775488975, 0.417959183673469387755102040816327])
# fmt: on


@dataclass(frozen=True)
class Pair:
    """Two rules on [−1, 1]^d that share their nodes, with weights that sum to 1, and fourth differences per axis.

    Attributes
    ----------
    nodes : ndarray, shape (P, d)
    fine, coarse : ndarray, shape (P,)
    differences : ndarray, shape (d, P)
    """

    nodes: FloatArray
    fine: FloatArray
    coarse: FloatArray
    differences: FloatArray


@lru_cache(maxsize=8)
def pair(d: int) -> Pair:
    """The embedded pair for `d` axes.

    Examples
    --------
    >>> rule = pair(3)  # ∫ x² y⁴ over the cube of volume 1
    >>> round(float(rule.fine @ (rule.nodes[:, 0] ** 2 * rule.nodes[:, 1] ** 4)) * 15, 12)
    1.0
    """
    if d == 1:
        line = np.concatenate([-_KRONROD, _KRONROD[-2::-1]])
        fine = np.concatenate([_KRONROD_WEIGHTS, _KRONROD_WEIGHTS[-2::-1]]) / 2
        coarse = np.zeros(15)
        coarse[1::2] = np.concatenate([_GAUSS_WEIGHTS, _GAUSS_WEIGHTS[-2::-1]]) / 2
        return Pair(line[:, None], fine, coarse, np.zeros((1, 15)))
    inner, outer, corner = (9 / 70) ** 0.5, 0.9**0.5, (9 / 19) ** 0.5
    axes = np.eye(d)
    nodes = [np.zeros(d)]
    nodes += [sign * inner * axis for axis in axes for sign in (1, -1)]
    nodes += [sign * outer * axis for axis in axes for sign in (1, -1)]
    signs = list(product((1, -1), repeat=2))
    nodes += [outer * (s * axes[i] + t * axes[j]) for i, j in combinations(range(d), 2) for s, t in signs]
    nodes += [corner * np.array(vertex) for vertex in product((1, -1), repeat=d)]
    counts = (1, 2 * d, 2 * d, 2 * d * (d - 1), 2**d)
    fine_weights = (
        (12824 - 9120 * d + 400 * d * d) / 19683,
        980 / 6561,
        (1820 - 400 * d) / 19683,
        200 / 19683,
        6859 / 19683 / 2**d,
    )
    coarse_weights = ((729 - 950 * d + 50 * d * d) / 729, 245 / 486, (265 - 100 * d) / 1458, 25 / 729, 0.0)
    differences = np.zeros((d, sum(counts)))
    for i in range(d):
        differences[i, 1 + 2 * i : 3 + 2 * i] = 1
        differences[i, 1 + 2 * d + 2 * i : 3 + 2 * d + 2 * i] = -1 / 7  # (9/70)/(9/10)
        differences[i, 0] = -2 + 2 / 7
    return Pair(np.array(nodes), np.repeat(fine_weights, counts), np.repeat(coarse_weights, counts), differences)


@dataclass
class _Cells:
    centres: FloatArray  # (K, d)
    halves: FloatArray  # (K, d)
    values: NDArray[Any]  # (K, C)
    errors: FloatArray  # (K, C)
    axes: NDArray[np.int64]  # (K,)

    def __getitem__(self, which: NDArray[Any]) -> _Cells:
        return _Cells(*(getattr(self, name)[which] for name in ("centres", "halves", "values", "errors", "axes")))

    def joined(self, other: _Cells) -> _Cells:
        names = ("centres", "halves", "values", "errors", "axes")
        return _Cells(*(np.concatenate([getattr(self, name), getattr(other, name)]) for name in names))


@dataclass(frozen=True)
class Cut:
    """∫ F over the cube as far as it was cut: value and error, shape (C,), and the number of cells."""

    value: NDArray[Any]
    error: FloatArray
    cells: int


def subdivide(
    values: Values, d: int, *, tol: float, points_left: Callable[[], int], report: Callable[[int, float], None]
) -> Cut:
    """∫ over [0, 1]^d of a function with values of shape (M, C), to `tol` in every component.

    Parameters
    ----------
    values : callable
        Takes points, shape (M, d).
    d : int
    tol : float
    points_left : callable
        How many points may still be asked for.
    report : callable
        Told the number of cells and the error after every generation.
    """
    rule = pair(d)
    cuts = FIRST_CUTS.get(d, 1)
    while cuts > 1 and cuts**d * len(rule.fine) > points_left():
        cuts -= 1
    middles = (np.arange(cuts) + 0.5) / cuts
    centres = np.stack([g.ravel() for g in np.meshgrid(*[middles] * d, indexing="ij")], axis=1)
    cells = _evaluated(values, centres, np.full(centres.shape, 0.5 / cuts))
    within = 0
    while True:
        errors = cells.errors.sum(axis=0)
        worst = float(errors.max())
        report(len(cells.axes), worst)
        affordable = points_left() // (2 * len(rule.fine))
        within = within + 1 if worst <= tol else 0
        if within > CONFIRMATIONS or affordable < 1:
            return Cut(cells.values.sum(axis=0), errors, len(cells.axes))
        shares = (cells.errors / np.where(errors > 0, errors, 1.0)).max(axis=1)
        order = np.argsort(-shares)
        reached = np.searchsorted(np.cumsum(shares[order]), SHARE * shares.sum()) + 1
        count = min(int(reached), MOST_CELLS, affordable)
        chosen, kept = order[:count], order[count:]
        children = _evaluated(values, *_halved(cells, chosen))
        children.errors = _sobered(cells[chosen], children)
        cells = cells[kept].joined(children)


def _sobered(parents: _Cells, children: _Cells) -> FloatArray:
    """Errors of the children, not below half of what halving changed where their parent was not smooth.

    On a smooth cell halving changes the value by far less than the two rules differ; across a kink or a jump it does
    not, and there the two rules may agree by accident.
    """
    half = len(parents.axes)
    change = np.abs(children.values[:half] + children.values[half:] - parents.values)
    least = np.where(change > ROUGH * parents.errors, change / 2, 0.0)
    return np.asarray(np.maximum(children.errors, np.concatenate([least, least])))


def _halved(cells: _Cells, chosen: NDArray[Any]) -> tuple[FloatArray, FloatArray]:
    rows = np.arange(len(chosen))
    centres, halves, axes = cells.centres[chosen], cells.halves[chosen].copy(), cells.axes[chosen]
    halves[rows, axes] /= 2
    shift = np.zeros_like(halves)
    shift[rows, axes] = halves[rows, axes]
    return np.concatenate([centres - shift, centres + shift]), np.concatenate([halves, halves])


def _evaluated(values: Values, centres: FloatArray, halves: FloatArray) -> _Cells:
    count, d = centres.shape
    rule = pair(d)
    points = (centres[:, None, :] + halves[:, None, :] * rule.nodes).reshape(-1, d)
    table = values(points).reshape(count, len(rule.fine), -1)
    volume = np.prod(2 * halves, axis=1)[:, None]
    fine = volume * np.einsum("p,kpc->kc", rule.fine, table)
    coarse = volume * np.einsum("p,kpc->kc", rule.coarse, table)
    fourth = np.abs(np.einsum("ip,kpc->kic", rule.differences, table)).max(axis=2)
    # Among equal differences, as where f is flat or d = 1, the longest edge is cut.
    flat = fourth.max(axis=1, keepdims=True) * 1e-6 + 1e-300
    axes = np.argmax(np.where(fourth >= fourth.max(axis=1, keepdims=True) - flat, halves, -1.0), axis=1)
    return _Cells(centres, halves, fine, SAFETY * np.abs(fine - coarse), axes)
