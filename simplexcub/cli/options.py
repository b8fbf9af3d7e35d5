"""Reading arguments: the parser that all commands share, numbers, lists and durations. Loads no numerical package."""

from __future__ import annotations

import argparse
import math
import re
from collections.abc import Callable, Sequence
from typing import Any, NoReturn

from simplexcub.cli.speech import one_line

_UNITS = {"": 1.0, "s": 1.0, "m": 60.0, "h": 3600.0}


class Parser(argparse.ArgumentParser):
    """An argument parser that explains itself with one example and complains in one line with status 2."""

    def __init__(self, *, prog: str, summary: str, example: str, more: str = "") -> None:
        super().__init__(
            prog=prog,
            description=summary[0].upper() + summary[1:].rstrip(".") + ".",
            epilog="\n\n".join(part for part in (more, f"example:\n  {example}") if part),
            formatter_class=argparse.RawDescriptionHelpFormatter,
            allow_abbrev=False,
        )

    def error(self, message: str) -> NoReturn:
        self.exit(2, f"simplexcub: {one_line(message)}. See '{self.prog} --help'\n")

    def parse_intermixed_args(  # type: ignore[override]
        self, args: Sequence[str] | None = None, namespace: None = None
    ) -> argparse.Namespace:
        """Parse options and positional arguments in any order; a value such as ``-1,2`` may follow its option."""
        return super().parse_intermixed_args(_bind_negative_values(list(args or ())), namespace)


def _bind_negative_values(args: list[str]) -> list[str]:
    """Write ``--alpha -1,2`` as ``--alpha=-1,2``, so the value is refused for what it is and not taken as an option."""
    bound: list[str] = []
    for arg in args:
        if bound and re.fullmatch(r"--[a-z-]+", bound[-1]) and re.match(r"-\.?\d", arg):
            bound[-1] += f"={arg}"
        else:
            bound.append(arg)
    return bound


def whole(text: str) -> int:
    """A whole number, or a complaint that says so."""
    if not re.fullmatch(r"[+-]?\d{1,9}", text.strip()):
        raise argparse.ArgumentTypeError(f"must be a whole number; got {text!r}")
    return int(text)


def whole_numbers(text: str) -> tuple[int, ...]:
    """Whole numbers separated by commas."""
    return tuple(whole(part) for part in text.split(","))


def listed(text: str) -> list[str]:
    """Texts separated by commas."""
    return [part.strip() for part in text.split(",")]


def positive(text: str) -> float:
    """A positive number, such as 1e-6."""
    return _number(text, lambda value: value > 0, "must be a positive number such as 1e-6")


def duration(text: str) -> float:
    """Seconds from ``90``, ``60s``, ``2m`` or ``1.5h``."""
    rule = "must be a duration such as 60s, 2m or 1h"
    match = re.fullmatch(r"(.*?)([smh]?)", text.strip())
    number, unit = match.groups() if match else (text, "")
    try:
        return _number(number, lambda value: value >= 0, rule) * _UNITS[unit]
    except argparse.ArgumentTypeError:
        raise argparse.ArgumentTypeError(f"{rule}; got {text!r}") from None


def _number(text: str, accepts: Callable[[float], Any], rule: str) -> float:
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not (math.isfinite(value) and accepts(value)):
        raise argparse.ArgumentTypeError(f"{rule}; got {text!r}")
    return value
