"""Which files the words of a command stand for: names, and patterns such as ``tables/flat/N3/*``.

A path below ``tables`` that does not exist where the command runs is looked for among the shipped tables.
"""

from __future__ import annotations

import glob
import os
from collections.abc import Iterable
from pathlib import Path

from simplexcub.errors import InputError
from simplexcub.table.shipped import INDEX, folder

_TABLES = "tables"


def located(path: str | os.PathLike[str]) -> Path:
    """The file itself, or the shipped table of that name where there is no such file."""
    here = Path(path)
    if not here.exists() and here.parts[:1] == (_TABLES,):
        shipped = folder().joinpath(*here.parts[1:])
        if shipped.is_file():
            return shipped
    return here


def select(words: Iterable[str | os.PathLike[str]]) -> tuple[list[Path], list[Path]]:
    """The files that `words` stand for, each once, in their order, and the files that are left out.

    One word that is a file's name stands for that file, whatever it is. Of several files, and of those that a pattern
    finds, only JSON tables are taken: names ending in ``.json``, and not the index.

    Raises
    ------
    InputError
        A pattern that finds nothing, or no table among the files.
    """
    listed = [os.fspath(word) for word in words]
    found: dict[Path, None] = {}
    for word in listed:
        if glob.has_magic(word) and not Path(word).exists():
            matches = _matches(word)
            if not matches:
                raise InputError(
                    "a pattern must match a file", repr(word), "See 'simplexcub tables' for what there is."
                )
            found |= dict.fromkeys(matches)
        else:
            found[located(word)] = None
    if len(listed) == 1 and len(found) == 1 and not glob.has_magic(listed[0]):
        return list(found), []
    tables = [path for path in found if path.suffix == ".json" and path.name != INDEX]
    if not tables:
        shown = ", ".join(path.name for path in found)
        raise InputError("of several files only JSON tables are taken, and one must be among them", shown)
    return tables, [path for path in found if path not in tables]


def _matches(pattern: str) -> list[Path]:
    """Files that fit the pattern, here or else among the shipped tables, in the order of their names."""
    matches = glob.glob(pattern, recursive=True)
    parts = Path(pattern).parts
    if not matches and parts[:1] == (_TABLES,):
        matches = glob.glob(os.path.join(glob.escape(str(folder())), *parts[1:]), recursive=True)
    return sorted(path for path in map(Path, matches) if path.is_file())


def short_names(paths: Iterable[Path]) -> list[str]:
    """A name for each file that tells it from the others: its stem, after as many folders as they do not share.

    Raises
    ------
    InputError
        Two files that would get one name.

    Examples
    --------
    >>> short_names([Path("tables/flat/N3/a.json"), Path("tables/bures/N3/a.json")])
    ['flat-N3-a', 'bures-N3-a']
    """
    whole = [path.resolve() for path in paths]
    shared = os.path.commonpath([path.parent for path in whole])
    names = ["-".join(path.relative_to(shared).with_suffix("").parts) for path in whole]
    twice = next((name for name in names if names.count(name) > 1), None)
    if twice is not None:
        raise InputError("files written to one folder must differ in name", twice, "Export them one by one.")
    return names
