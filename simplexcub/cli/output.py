"""Numbers as text, progress on a terminal, and files that must not be found unwritable after the work is done."""

from __future__ import annotations

import os
import shutil
import sys
import tempfile
from decimal import Decimal
from fractions import Fraction
from pathlib import Path
from types import TracebackType
from typing import Protocol

from simplexcub.decimals import to_decimal
from simplexcub.errors import InputError


def exact_text(value: Fraction, digits: int) -> str:
    """A fraction and its decimal: ``=`` where the decimal ends within `digits` digits, ``≈`` where it is rounded.

    Examples
    --------
    >>> exact_text(Fraction(3, 5), 50)
    '3/5 = 0.6'
    >>> exact_text(Fraction(1, 33), 4)
    '1/33 ≈ 0.03030'
    """
    if value.denominator == 1:
        return _integer(value.numerator)
    fraction = f"{_integer(value.numerator)}/{_integer(value.denominator)}"
    decimal = to_decimal(value, digits)
    shortest = decimal.rstrip("0")
    return f"{fraction} = {shortest}" if Fraction(Decimal(shortest)) == value else f"{fraction} ≈ {decimal}"


def _integer(n: int) -> str:
    """`n` in digits, however many; ``str`` alone refuses integers beyond some thousands."""
    return format(Decimal(n), "f")


class HasText(Protocol):
    """A report of progress; `text` says where the work stands."""

    @property
    def text(self) -> str: ...


class ProgressLine:
    """One line on standard error that is rewritten in place, and left blank at the end; silent without a terminal."""

    def __init__(self) -> None:
        self._shown = 0
        self._terminal = sys.stderr.isatty()

    def __call__(self, progress: HasText) -> None:
        if self._terminal:
            width = shutil.get_terminal_size().columns - 1
            self._write(progress.text[:width])

    def __enter__(self) -> ProgressLine:
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None) -> None:
        if self._shown:
            self._write("")
            print(end="\r", file=sys.stderr, flush=True)

    def _write(self, text: str) -> None:
        print(f"\r{text.ljust(self._shown)}", end="", file=sys.stderr, flush=True)
        self._shown = len(text)


def require_writable(path: Path) -> None:
    """Refuse an output path that cannot be written, by making a passing file beside it.

    Raises
    ------
    InputError
        A folder, no such folder, or no permission.
    """
    remedy = "Nothing was computed; choose another path."
    target = path.resolve()
    if target.is_dir():
        raise InputError(f"{path} must be a path that can be written", "a folder", remedy)
    if target.exists() and not os.access(target, os.W_OK):
        raise InputError(f"{path} must be a path that can be written", "a file without write permission", remedy)
    if target.exists() and not target.is_file():
        return
    try:
        with tempfile.TemporaryFile(dir=target.parent):
            pass
    except (OSError, ValueError) as error:
        reason = str(getattr(error, "strerror", None) or error).lower()
        raise InputError(f"{path} must be a path that can be written", reason, remedy) from None
