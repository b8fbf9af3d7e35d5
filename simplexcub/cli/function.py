"""The function on the command line: a name, an expression, or code of the user's own."""

from __future__ import annotations

import re
import sys
from importlib import import_module
from pathlib import Path
from typing import Any

from simplexcub.average.expression import FUNCTIONS, parse_expression
from simplexcub.average.functions import NAMES, Unit, spectral_function
from simplexcub.errors import InputError
from simplexcub.measures import Measure

_LIKE_A_NAME = re.compile(r"[A-Za-z]+([-_][A-Za-z]+)*(-[^\s()*]*)?")


def function_of(text: str, measure: Measure, unit: Unit) -> Any:
    """The function that `text` names, or else writes.

    Raises
    ------
    InputError
        Neither a name nor an expression; bits of an expression.
    """
    if _is_expression(text):
        if unit != "nats":
            raise InputError("--bits must come with a named entropy", repr(text), "In an expression write log2.")
        return parse_expression(text, measure)
    try:
        return spectral_function(text, unit=unit)
    except InputError as error:
        if "must be one of" not in error.rule:
            raise
        words = f"{error.rule}, or an expression in x such as 'sum(sqrt(x))**2 - 1'"
        raise InputError(words, error.value, error.remedy) from None


def _is_expression(text: str) -> bool:
    """Whether it reads as one: x or x1 stands in it, or a function with its bracket, and it is no name."""
    if _LIKE_A_NAME.fullmatch(text) and any(text.startswith(name.split("-")[0] + "-") for name in NAMES):
        return False
    return bool(re.search(r"\bx\d*\b|\(", text)) or bool(re.fullmatch(r"[-+*/ .\deN]*\d[-+*/ .\deN]*", text))


def python_function(text: str) -> Any:
    """The callable that MODULE:FUNCTION names; importing the module runs its code, from the current folder too.

    Raises
    ------
    InputError
        No colon, a module that cannot be imported, or no such callable in it.
    """
    module, colon, name = text.partition(":")
    if not colon or not all(part.isidentifier() for part in (*module.split("."), name)):
        raise InputError("--python must be MODULE:FUNCTION", repr(text), "As in --python mycode:entropy")
    here = str(Path.cwd())
    added = here not in sys.path
    if added:
        sys.path.insert(0, here)
    try:
        found = getattr(import_module(module), name, None)
    except Exception as error:  # noqa: BLE001 -- the user's code may raise anything
        what = f"{type(error).__name__}: {error}"
        raise InputError(f"{module} must be a module that can be imported", what, "Is it in this folder?") from None
    finally:
        if added:
            sys.path.remove(here)
    if not callable(found):
        raise InputError(f"{module} must have a function {name}", "none" if found is None else repr(found))
    return found


GRAMMAR = (
    "an expression: numbers, x (all components), x1 to xN (of a spectrum, x1 is the largest), N, pi, + - * / ** and "
    + ", ".join(FUNCTIONS)
)
