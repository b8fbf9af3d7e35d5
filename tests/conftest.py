"""What every test shares: reproducible property tests, and the command line run for real."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable, Sequence
from pathlib import Path

import pytest
from hypothesis import settings

from simplexcub.cli import main

settings.register_profile("reproducible", derandomize=True, deadline=None, database=None)
settings.load_profile("reproducible")

Call = Callable[..., tuple[int, list[str], list[str]]]
Run = Callable[..., subprocess.CompletedProcess[str]]


@pytest.fixture
def call(capsys: pytest.CaptureFixture[str]) -> Call:
    """Runs a command in this process; returns its status and the lines of its two output streams."""

    def run(*arguments: object) -> tuple[int, list[str], list[str]]:
        capsys.readouterr()
        status = main([str(argument) for argument in arguments])
        out, err = capsys.readouterr()
        return status, out.splitlines(), err.splitlines()

    return run


@pytest.fixture
def run_command(tmp_path: Path) -> Run:
    """Runs ``python -m simplexcub ARGUMENTS`` in an empty folder; standard input and the environment can be given."""

    def run(*arguments: str, environment: dict[str, str] | None = None) -> subprocess.CompletedProcess[str]:
        return subprocess.run(
            [sys.executable, "-m", "simplexcub", *arguments],
            cwd=tmp_path,
            env={**package_environment(), **(environment or {})},
            capture_output=True,
            text=True,
            encoding="utf-8",
            timeout=300,
            check=False,
        )

    return run


def package_environment() -> dict[str, str]:
    """The environment in which a new interpreter finds the same copy of the package as this one."""
    return {**os.environ, "PYTHONPATH": os.pathsep.join(_absolute(sys.path)), "PYTHONIOENCODING": "utf-8"}


def _absolute(paths: Sequence[str]) -> list[str]:
    return [str(Path(path).resolve()) for path in paths]
