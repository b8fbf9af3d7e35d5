"""Finite sets of state vectors as rules: squared moduli for the flat measure, reduced spectra for the induced one.

A unit vector ψ of D components, Haar distributed, has squared moduli |ψ_i|² that are flat on the simplex. With
D = d1·d2 the eigenvalues of its reduced density matrix of dimension N = min(d1, d2) follow the induced measure with
K = max(d1, d2). A set of states that averages polynomials of degree (t, t) in ψ and its conjugate therefore gives rules
of degree at least t.

Reference: K. Życzkowski, H.-J. Sommers, J. Phys. A 34 (2001) 7111–7125.
"""

from __future__ import annotations

import csv
import os
from collections import Counter
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from simplexcub.errors import InputError, TableError
from simplexcub.measures import Measure, flat, induced
from simplexcub.rule import Provenance, Rule, Space

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]

LARGEST_FILE = 64 * 1024 * 1024
PLACES = 14  # what double precision leaves of a squared modulus


def read_states(path: str | os.PathLike[str]) -> ComplexArray:
    """State vectors from an npy file, or from CSV rows re_1, im_1, re_2, im_2, …; shape (M, D), normalised.

    Raises
    ------
    InputError
        The file cannot be opened.
    TableError
        It holds no matrix of numbers, a zero vector, or a number that is not finite.
    """
    name = os.fspath(path)
    try:
        with open(name, "rb") as file:
            start = file.read(6)
            size = os.fstat(file.fileno()).st_size
    except (OSError, ValueError) as error:
        raise InputError(f"{name} must be a readable file", str(getattr(error, "strerror", error)).lower()) from None
    if size > LARGEST_FILE:
        raise TableError(f"{name} must hold at most 64 MB of states", "a larger file")
    return normalised(_from_npy(name) if start == b"\x93NUMPY" else _from_rows(name), name)


def normalised(states: ComplexArray, name: str = "states") -> ComplexArray:
    """Vectors of norm 1 along the same rays.

    Raises
    ------
    TableError
        No matrix with at least one row and two columns, a zero vector, or a number that is not finite.
    """
    if states.ndim != 2 or states.shape[0] < 1 or states.shape[1] < 2:
        raise TableError(f"{name} must hold one state vector of at least 2 components per row", f"shape {states.shape}")
    if not np.isfinite(states).all():
        raise TableError(f"{name}: amplitudes must be finite", "inf or nan")
    peak = np.abs(states).max(axis=1, keepdims=True)
    if not peak.all():
        raise TableError(f"{name}: a state vector must not vanish", "a row of zeros")
    scaled = states / peak
    vectors: ComplexArray = scaled / np.linalg.norm(scaled, axis=1, keepdims=True)
    return vectors


def moduli_rule(states: ComplexArray, space: Space = "all") -> Rule:
    """Squared moduli with equal weights, for the flat measure; a rule of degree 0, which claims nothing.

    Parameters
    ----------
    states : ndarray, shape (M, D)
        Unit vectors.
    space : {"all", "symmetric"}
    """
    squared = np.abs(states) ** 2
    return _rule(flat(states.shape[1]), squared, space, "squared moduli of states")


def reduced_rule(states: ComplexArray, d1: int, d2: int) -> Rule:
    """Spectra of reduced density matrices with equal weights, for the induced measure, in space ``symmetric``.

    Parameters
    ----------
    states : ndarray, shape (M, d1·d2)
        Unit vectors, the first factor's index counting slowest.
    d1, d2 : int
        Dimensions of the factors, at least 2.

    Raises
    ------
    InputError
        Dimensions that do not fit the vectors.
    """
    if min(d1, d2) < 2 or d1 * d2 != states.shape[1]:
        raise InputError(f"d1,d2 must be at least 2 each with product {states.shape[1]}", f"{d1},{d2}")
    singular = np.linalg.svd(states.reshape(-1, d1, d2), compute_uv=False)
    measure = induced(min(d1, d2), max(d1, d2))
    squared = np.asarray(singular**2, dtype=np.float64)
    return _rule(measure, squared, "symmetric", f"spectra of states reduced from {d1} x {d2}")


def _rule(measure: Measure, points: FloatArray, space: Space, method: str) -> Rule:
    """Equal points become one node with their weights together."""
    if space == "symmetric":
        points = -np.sort(-points, axis=1)
    counts = Counter(tuple(_text(float(x)) for x in point) for point in points)
    weights = tuple(_text(count / len(points)) for count in counts.values())
    return Rule(
        measure,
        0,
        tuple(counts),
        weights,
        Provenance("not stated", 0, "undated", method),
        space=space,
        symmetry="full" if space == "symmetric" else "none",
        digits=PLACES,
    )


def _text(x: float) -> str:
    text = f"{x:.{PLACES}f}"
    return "0" if float(text) == 0 else text


def _from_npy(name: str) -> ComplexArray:
    try:
        # Mapped, a header that promises more than the file holds is refused before anything is allocated.
        array = np.load(name, mmap_mode="r", allow_pickle=False)
        return np.array(array, dtype=np.complex128)
    except (ValueError, TypeError, OSError, EOFError, MemoryError, SyntaxError):
        rule = f"{name} must be an npy file of numbers"
        raise TableError(rule, "another content", "Save it with numpy.save; objects are not read.") from None


def _from_rows(name: str) -> ComplexArray:
    rows: list[list[float]] = []
    try:
        with open(name, encoding="utf-8-sig", newline="") as file:
            for cells in csv.reader(file):
                if cells and not cells[0].lstrip().startswith("#") and (rows or _is_number(cells[0])):
                    rows.append([float(cell) for cell in cells])
    except (ValueError, csv.Error):
        raise TableError(f"{name} must hold rows of numbers re,im,re,im,...", "another content") from None
    return _paired(rows, name)


def _paired(rows: Sequence[Sequence[float]], name: str) -> ComplexArray:
    if not rows or any(len(row) != len(rows[0]) or len(row) % 2 for row in rows):
        raise TableError(f"{name}: every row must hold the same even number of columns, re and im in turn", "others")
    table = np.array(rows)
    return table[:, 0::2] + 1j * table[:, 1::2]


def _is_number(cell: str) -> bool:
    try:
        float(cell)
    except ValueError:
        return False
    return True
