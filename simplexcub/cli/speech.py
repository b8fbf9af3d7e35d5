"""What the commands say beside their results: complaints and remarks of one line, on standard error."""

from __future__ import annotations

import io
import sys


def one_line(text: str) -> str:
    """`text` on a single line, whatever a file name or a value brought in."""
    return " ".join(text.split())


def complain(text: str) -> None:
    """Say `text` on standard error, as one line."""
    print(f"simplexcub: {one_line(text)}", file=sys.stderr)


def tolerate_narrow_encodings() -> None:
    """Let streams that cannot spell λ print an escape instead of failing after the work is done."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="backslashreplace")


def show_place(text: str, caret: str) -> None:
    """Show `text` on standard error, and below it the line that points at a place in it."""
    print(f"  {text}\n  {caret}", file=sys.stderr)
