"""Pictures of rules and of their convergence, for print; matplotlib draws them and is loaded when one is asked for."""

from __future__ import annotations

import os
from collections.abc import Sequence
from importlib import import_module
from importlib.util import find_spec
from typing import TYPE_CHECKING, Any

from simplexcub.errors import InputError
from simplexcub.rule import Rule
from simplexcub.table.files import write_atomically

if TYPE_CHECKING:
    from simplexcub.picture.errors import Error

__all__ = ["ENDINGS", "available", "draw", "draw_convergence", "encode", "kind_of"]

ENDINGS = ("svg", "png", "pdf")


def available() -> bool:
    """Whether pictures can be drawn here: matplotlib is installed."""
    return find_spec("matplotlib") is not None


def kind_of(path: str | os.PathLike[str]) -> str:
    """The kind of picture that a file's ending chooses.

    Raises
    ------
    InputError
        Another ending than svg, png or pdf.

    Examples
    --------
    >>> kind_of("nodes.SVG")
    'svg'
    """
    ending = os.path.splitext(os.fspath(path))[1].lower().removeprefix(".")
    if ending not in ENDINGS:
        known = ", ".join(f".{name}" for name in ENDINGS)
        raise InputError(f"the picture's ending must be one of {known}", os.fspath(path))
    return ending


def encode(rule: Rule, kind: str, *, dpi: int = 300) -> bytes:
    """The picture of a rule as the bytes of a file; the same rule gives the same bytes.

    Parameters
    ----------
    rule : Rule
        N = 2 is drawn on a line, N = 3 on the triangle, N = 4 in the tetrahedron, larger N as profiles of the sorted
        components. Rules of ordered spectra are drawn on the chamber.
    kind : {"svg", "png", "pdf"}
    dpi : int
        Dots per inch of a png.

    Raises
    ------
    InputError
        No matplotlib, an unknown kind, or fewer than two components.
    """
    if kind not in ENDINGS:
        raise InputError(f"kind must be one of {', '.join(ENDINGS)}", kind)
    content: bytes = _drawing().rule_picture(rule, kind, dpi=dpi)
    return content


def draw(rule: Rule, path: str | os.PathLike[str]) -> None:
    """Write the picture of a rule to a file, atomically; the ending chooses the kind.

    Raises
    ------
    InputError
        As for :func:`encode`; also an unknown ending, or a path that cannot be written.
    """
    write_atomically(path, encode(rule, kind_of(path)))


def draw_convergence(errors: Sequence[Error], title: str, path: str | os.PathLike[str], *, spread: float) -> None:
    """Write the picture of errors against degree and against nodes, atomically.

    Parameters
    ----------
    errors : sequence of Error
        From :func:`simplexcub.picture.errors.measure_errors`.
    title : str
    path : path-like
    spread : float
        Standard deviation of the function; the error of plain sampling is drawn beside that of the rules.

    Raises
    ------
    InputError
        No matplotlib, an unknown ending, or a path that cannot be written.
    """
    kind = kind_of(path)
    content: bytes = _drawing().convergence_picture(errors, title, kind, spread=spread)
    write_atomically(path, content)


def _drawing() -> Any:
    if not available():
        raise InputError("a picture needs matplotlib", "none here", "Install it: pip install matplotlib")
    return import_module("simplexcub.picture.drawing")
