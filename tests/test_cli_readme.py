"""The commands and the Python session that the README shows do what it says.

Digits that depend on rounding, and the date, are left out of the comparison; a line with … stands for all that follows.
"""

from __future__ import annotations

import doctest
import re
import shlex
from itertools import pairwise
from pathlib import Path

import pytest
from conftest import Call

from simplexcub.cli import COMMANDS

README = Path(__file__).resolve().parent.parent / "README.md"
VARYING = [
    (re.compile(r"\d\.\de-\d+"), "RESIDUAL"),
    (re.compile(r"\d{4}-\d\d-\d\d"), "DATE"),
    (re.compile(r"in the mean of \S+|at exponents \S+"), "WORST"),
    (re.compile(r"(0\.\d{10})\d{0,5}\b"), r"\1"),
]


def sessions() -> list[tuple[str, list[str]]]:
    """Every command of the README's console blocks with the lines shown below it."""
    found = []
    for block in re.findall(r"^```console\n(.*?)^```", README.read_text(encoding="utf-8"), re.M | re.S):
        lines = block.splitlines()
        starts = [k for k, line in enumerate(lines) if line.startswith("$ ")]
        found += [(lines[a][2:], lines[a + 1 : b]) for a, b in pairwise([*starts, len(lines)])]
    return found


def write_files(folder: Path) -> None:
    """The files that the README shows, under the names that stand behind their fences."""
    for name, text in re.findall(r"^```text (\S+)\n(.*?)^```", README.read_text(encoding="utf-8"), re.M | re.S):
        (folder / name).write_text(text, encoding="utf-8")


def steady(line: str) -> str:
    """The line without what varies from run to run or from machine to machine."""
    for pattern, replacement in VARYING:
        line = pattern.sub(replacement, line)
    return line.rstrip()


def test_every_command_prints_what_the_readme_shows(
    call: Call, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    write_files(tmp_path)
    shown = sessions()
    assert {command.split()[1] for command, _ in shown} == set(COMMANDS)
    for command, expected in shown:
        program, *arguments = shlex.split(command)
        status, out, err = call(*arguments)
        assert (program, status, err) == ("simplexcub", 0, [])
        length = expected.index("…") if "…" in expected else max(len(out), len(expected))
        assert [steady(line) for line in out[:length]] == [steady(line) for line in expected[:length]]


def test_the_python_session() -> None:
    failed, tried = doctest.testfile(str(README), module_relative=False)
    assert failed == 0
    assert tried > 5
