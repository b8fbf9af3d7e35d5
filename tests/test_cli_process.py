"""The program as a process of its own: start-up, streams, pipes, signals."""

from __future__ import annotations

import io
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import pytest
from conftest import Call, Run, package_environment

from simplexcub import __version__
from simplexcub.cli import COMMANDS
from simplexcub.cli.output import HasText, ProgressLine
from simplexcub.search import Progress

HEAVY = ("numpy", "scipy", "mpmath")
PRINT_HEAVY = f"import sys; print([name for name in {HEAVY} if name in sys.modules])"


def loaded_by(statement: str) -> str:
    """Which heavy packages are loaded after `statement` in a fresh interpreter."""
    done = subprocess.run(
        [sys.executable, "-c", f"{statement}; {PRINT_HEAVY}"],
        env=package_environment(),
        capture_output=True,
        text=True,
        check=True,
    )
    return done.stdout.splitlines()[-1]


def test_importing_the_package_loads_nothing_heavy() -> None:
    assert loaded_by("import simplexcub") == "[]"
    assert loaded_by("import simplexcub; simplexcub.flat") != "[]"


@pytest.mark.parametrize("arguments", [["--help"], ["--version"], ["nonsense"], []])
def test_help_and_usage_errors_load_nothing_heavy(arguments: list[str]) -> None:
    assert loaded_by(f"from simplexcub.cli import main; main({arguments!r})") == "[]"


def test_version_and_help(run_command: Run) -> None:
    assert run_command("--version").stdout == f"simplexcub {__version__}\n"
    page = run_command("--help").stdout
    assert all(f"  {name} " in page for name in COMMANDS)


def test_one_line_and_status_two_for_bad_input(run_command: Run) -> None:
    done = run_command("solve", "flat", "-N", "1", "-t", "3")
    assert (done.returncode, done.stdout, done.stderr.count("\n")) == (2, "", 1)


def test_solve_then_verify(run_command: Run, tmp_path: Path) -> None:
    solved = run_command("solve", "hilbert-schmidt", "-N", "3", "-t", "7", "-o", "hs.json")
    assert (solved.returncode, solved.stderr, solved.stdout.count("\n")) == (0, "", 1)
    assert [path.name for path in tmp_path.iterdir()] == ["hs.json"]
    checked = run_command("verify", "hs.json")
    assert (checked.returncode, checked.stderr) == (0, "")


def test_a_terminal_that_cannot_spell_greek_gets_escapes(run_command: Run) -> None:
    done = run_command(
        "moments", "flat", "-N", "2", "--exponents", "1,0", environment={"PYTHONIOENCODING": "ascii", "PYTHONUTF8": "0"}
    )
    assert (done.returncode, done.stdout.splitlines()[0]) == (0, "E[\\u03bb1] = 1/2 = 0.5")


def test_a_reader_that_leaves_is_no_reason_to_complain() -> None:
    with subprocess.Popen(
        [sys.executable, "-m", "simplexcub", "tables"],
        env=package_environment(),
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    ) as process:
        assert process.stdout is not None
        assert process.stderr is not None
        process.stdout.close()
        assert process.stderr.read() == ""
    assert process.returncode == 141


def test_an_interrupt_before_anything_was_found_is_one_line() -> None:
    # Loading is done and Ctrl-C is obeyed, also where the tests run in the background, before the clock starts.
    program = (
        "import signal, sys; signal.signal(signal.SIGINT, signal.default_int_handler); import simplexcub.cli.solve; "
        "print('ready', flush=True); "
        "sys.exit(simplexcub.cli.main('solve flat -N 4 -t 25 --symmetry none --budget 1h'.split()))"
    )
    with subprocess.Popen(
        [sys.executable, "-c", program],
        env=package_environment(),
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    ) as process:
        assert process.stdout is not None
        assert process.stdout.readline() == "ready\n"
        time.sleep(1.0)
        process.send_signal(signal.SIGINT)
        out, err = process.communicate(timeout=120)
    assert (process.returncode, out, err) == (130, "", "simplexcub: interrupted\n")


@pytest.fixture
def obeyed_interrupts() -> Iterator[None]:
    """Ctrl-C as in a terminal; jobs in the background start with it switched off."""
    before = signal.signal(signal.SIGINT, signal.default_int_handler)
    yield
    signal.signal(signal.SIGINT, before)


@pytest.mark.usefixtures("obeyed_interrupts")
def test_an_interrupted_search_prints_the_rule_it_has(call: Call, monkeypatch: pytest.MonkeyPatch) -> None:
    class Impatient(ProgressLine):
        def __call__(self, progress: HasText) -> None:
            if "best so far" in progress.text:
                signal.raise_signal(signal.SIGINT)

    monkeypatch.setattr("simplexcub.cli.solve.ProgressLine", Impatient)
    status, out, err = call("solve", "hilbert-schmidt", "-N", "3", "-t", "7", "--digits", "20")
    assert (status, err) == (130, ["simplexcub: interrupted; the best rule so far was kept"])
    assert "  status        verified" in out
    assert signal.getsignal(signal.SIGINT) is signal.default_int_handler


def test_progress_is_one_line_that_leaves_a_terminal_as_it_was(monkeypatch: pytest.MonkeyPatch) -> None:
    terminal = io.StringIO()
    monkeypatch.setattr(terminal, "isatty", lambda: True)
    monkeypatch.setattr(sys, "stderr", terminal)
    with ProgressLine() as show:
        show(Progress("a longer line", 0.0))
        show(Progress("short", 1.0))
    assert terminal.getvalue() == "\ra longer line\rshort        \r     \r"


def test_progress_is_silent_without_a_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    pipe = io.StringIO()
    monkeypatch.setattr(sys, "stderr", pipe)
    with ProgressLine() as show:
        show(Progress("anything", 0.0))
    assert pipe.getvalue() == ""
