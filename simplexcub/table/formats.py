"""The formats by name, and choosing one."""

from __future__ import annotations

import os
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType

from simplexcub.errors import InputError
from simplexcub.rule import Rule
from simplexcub.table import (
    appendix,
    as_c,
    as_csv,
    as_fortran,
    as_json,
    as_latex,
    as_markdown,
    as_npz,
    as_python,
    as_text,
)
from simplexcub.table.files import write_atomically
from simplexcub.verify import verify


@dataclass(frozen=True)
class Format:
    """One way to write a rule down.

    Attributes
    ----------
    endings : tuple of str
        File endings that choose it; the first is its own.
    export : callable
        Rule → text, or bytes where `binary`. The rule should carry its verification.
    binary : bool
    several : callable, optional
        Several rules → one text, where the format can hold them.
    """

    endings: tuple[str, ...]
    export: Callable[[Rule], str | bytes]
    binary: bool = False
    several: Callable[[Sequence[Rule]], str] | None = None


FORMATS: Mapping[str, Format] = MappingProxyType(
    {
        "json": Format((".json",), as_json.export),
        "csv": Format((".csv",), as_csv.export),
        "text": Format((".txt", ".text", ".dat"), as_text.export),
        "markdown": Format((".md", ".markdown"), as_markdown.export, several=as_markdown.export_several),
        "latex": Format((".tex",), as_latex.export, several=appendix.appendix),
        "npz": Format((".npz",), as_npz.export, binary=True),
        "python": Format((".py",), as_python.export),
        "c": Format((".c", ".h"), as_c.export),
        "fortran": Format((".f90",), as_fortran.export),
    }
)


def encode(rules: Rule | Sequence[Rule], to: str, *, standalone: bool = False, screen: bool = False) -> bytes:
    """One or several rules in format `to`, as the bytes of a file; what was never checked is verified first.

    Parameters
    ----------
    rules : Rule or sequence of Rule
    to : str
    standalone : bool
        A LaTeX document that compiles as it is.
    screen : bool
        Refuse a format that is not text.

    Raises
    ------
    InputError
        An unknown format, several rules for a format that holds one, or a format that is not fit for the purpose.
    """
    if to not in FORMATS:
        raise InputError(f"format must be one of {', '.join(FORMATS)}", repr(to))
    form = FORMATS[to]
    if screen and form.binary:
        remedy = f"Write it to a file ending in {form.endings[0]}."
        raise InputError("a format on the screen must be text", to, remedy)
    if standalone and to != "latex":
        raise InputError("a standalone document must be latex", to)
    listed = [_verified(rule) for rule in ([rules] if isinstance(rules, Rule) else rules)]
    content: str | bytes
    if standalone:
        content = appendix.appendix(listed, standalone=True)
    elif len(listed) == 1:
        content = form.export(listed[0])
    elif form.several is not None and listed:
        content = form.several(listed)
    else:
        raise InputError(f"{to} holds one rule in a file", f"{len(listed)} rules", "Write one file for each.")
    return content if isinstance(content, bytes) else content.encode("utf-8")


def _verified(rule: Rule) -> Rule:
    return rule.verified(verify(rule).verification) if rule.verification is None else rule


def render(rules: Rule | Sequence[Rule], to: str = "text", *, standalone: bool = False) -> str:
    """One or several rules as text in format `to`; what was never checked is verified first.

    Raises
    ------
    InputError
        As for :func:`encode`; also a format that is not text.
    """
    return encode(rules, to, standalone=standalone, screen=True).decode("utf-8")


def format_of(path: str | os.PathLike[str]) -> str:
    """The format that a file's ending chooses.

    Raises
    ------
    InputError
        An ending that belongs to no format.
    """
    ending = os.path.splitext(os.fspath(path))[1].lower()
    for name, form in FORMATS.items():
        if ending in form.endings:
            return name
    known = ", ".join(form.endings[0] for form in FORMATS.values())
    raise InputError(f"the file's ending must be one of {known}", os.fspath(path), "Or name the format: to=..., --to.")


def save(rule: Rule, path: str | os.PathLike[str], *, to: str | None = None) -> None:
    """Write the rule to a file, atomically: whatever goes wrong, an existing file is not lost.

    Parameters
    ----------
    rule : Rule
        Verified first if it never was. A rule that does not hold is written too, and says so.
    path : path-like
    to : str, optional
        Name of the format; by default the ending of `path` chooses it.

    Raises
    ------
    InputError
        An unknown format or a path that cannot be written.
    """
    write_atomically(path, encode(rule, to if to is not None else format_of(path)))
