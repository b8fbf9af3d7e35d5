"""Bad input: one line on standard error that names the value and the way out, status 2, nothing lost."""

from __future__ import annotations

from pathlib import Path

import pytest
from conftest import Call

from simplexcub.cli.output import require_writable
from simplexcub.errors import InputError
from simplexcub.rule import Rule

SOLVE = ("solve", "flat", "-N", "2", "-t", "3")


@pytest.mark.parametrize(
    ("arguments", "parts"),
    [
        (("moments", "flat", "-N", "1", "--exponents", "1"), ("N must be", "at least 2", "got 1")),
        (("moments", "flat", "-N", "-3", "--exponents", "1"), ("N must be", "at least 2", "got -3")),
        (("moments", "flat", "-N", "two", "--exponents", "1"), ("-N", "whole number", "'two'")),
        (("moments", "flat", "-N", "3.0", "--exponents", "1"), ("-N", "whole number", "'3.0'")),
        (("moments", "flat", "--exponents", "1,1"), ("flat needs N",)),
        (("moments", "uniform", "-N", "2", "--exponents", "1,1"), ("measure must be one of flat,", "uniform")),
        (("moments", "induced", "-N", "3", "--exponents", "1,1,1"), ("needs N and K",)),
        (("moments", "induced", "-N", "3", "-K", "2", "--exponents", "1,1,1"), ("K must be", "at least 3", "got 2")),
        (("moments", "dirichlet", "--alpha", "1,0", "--exponents", "1,1"), ("alpha must be positive", "got 0")),
        (("moments", "dirichlet", "--alpha", "-1,2", "--exponents", "1,1"), ("alpha must be positive", "got -1")),
        (("moments", "dirichlet", "--alpha", "a,2", "--exponents", "1,1"), ("alpha must hold numbers", "'a'")),
        (("moments", "dirichlet", "--alpha", "2", "--exponents", "1"), ("at least 2 entries",)),
        (("moments", "flat", "-N", "3", "--exponents", "1,1"), ("one entry per component", "(1, 1)")),
        (("moments", "flat", "-N", "2", "--exponents", "-1,2"), ("non-negative", "(-1, 2)")),
        (("moments", "flat", "-N", "2", "--exponents", "1,,2"), ("--exponents", "whole number", "''")),
        (("moments", "flat", "-N", "2"), ("must be given", "--exponents")),
        (("moments", "flat", "-N", "2", "--exponents", "1,1", "--digits", "0"), ("digits must be", "got 0")),
        (("moments", "flat", "-N", "2", "--exponents", "1,1", "--digits", "999999999"), ("digits must be",)),
        (("solve", "flat", "-N", "2", "-t", "0"), ("degree must be", "at least 1", "got 0")),
        (("solve", "flat", "-N", "2", "-t", "-7"), ("degree must be", "at least 1", "got -7")),
        (("solve", "flat", "-N", "2"), ("required", "--degree")),
        (("solve", "flat", "-N", "2", "-t", "3", "--digits", "0"), ("digits must be", "got 0")),
        (("solve", "flat", "-N", "2", "-t", "3", "--jobs", "0"), ("jobs must be", "got 0")),
        (("solve", "flat", "-N", "2", "-t", "3", "--seed", "-1"), ("seed must be", "got -1")),
        (("solve", "flat", "-N", "2", "-t", "3", "--budget", "soon"), ("--budget", "60s, 2m or 1h", "'soon'")),
        (("solve", "flat", "-N", "2", "-t", "3", "--budget", "-5s"), ("--budget", "60s, 2m or 1h", "'-5s'")),
        (("solve", "flat", "-N", "2", "-t", "3", "--budget", "nan"), ("--budget", "'nan'")),
        (("solve", "flat", "-N", "2", "-t", "3", "--budget", "0"), ("budget must be", "got 0")),
        (("solve", "flat", "-N", "2", "-t", "3", "--space", "most"), ("--space", "'most'", "all")),
        (
            ("solve", "flat", "-N", "2", "-t", "3", "--symmetry", "half"),
            ("symmetry must be one of full,", "none", "got half"),
        ),
        (("solve", "flat", "-N", "3", "-t", "3", "--symmetry", "klein"), ("symmetry klein needs N = 4", "got 3")),
        (("solve", "flat", "-N", "3", "-t", "3", "--symmetry", "product-2"), ("sum to N = 3", "got product-2")),
        (("solve", "dirichlet", "--alpha", "1,2", "-t", "3", "--symmetry", "cyclic"), ("unchanged", "got cyclic")),
        (("solve", "flat", "-N", "3", "-t", "3", "--resume", "/dev/null/x"), ("search folder", "/dev/null/x")),
        (("solve", "flat", "-N", "3", "-t", "3", "--cluster", "nowhere"), ("--cluster must be", "got nowhere")),
        (("solve", "flat", "-N", "3", "-t", "3", "--cluster", "tcp://a:b"), ("--cluster must be", "got tcp://a:b")),
        (("solve", "flat", "-N", "2", "-t", "3", "--colour"), ("unrecognized arguments: --colour", "--help")),
        (("average", "flat", "-N", "2", "purty"), ("function must be one of", "'purty'", "Nearest: purity")),
        (("average", "flat", "-N", "2", "renyi-x"), ("order Q must be a number", "'renyi-x'")),
        (("average", "flat", "-N", "2", "a\nb"), ("function must be one of",)),
        (("average", "flat", "-N", "2"), ("required", "FUNCTION")),
        (("average", "flat", "-N", "2", "purity", "--tol", "0"), ("--tol", "positive number", "'0'")),
        (("average", "flat", "-N", "2", "purity", "--tol", "-1e-3"), ("--tol", "positive number", "'-1e-3'")),
        (("average", "flat", "-N", "2", "purity", "--tol", "inf"), ("--tol", "positive number", "'inf'")),
        (("tables", "bures-like"), ("measure must be one of", "bures-like")),
        (("export", "missing.json", "--to", "docx"), ("--to", "'docx'", "json")),
        (("export", "missing.json", "--to", "csv"), ("missing.json", "no such file")),
        (("verify", "missing.json"), ("missing.json", "no such file")),
        (("verify", "."), (".", "directory")),
        (("verify", "missing.json", "-N", "3"), ("must come with --measure", "-N")),
        (("verify",), ("required", "FILE")),
        (("slove", "flat"), ("command must be one of", "'slove'", "Nearest: solve")),
        ((), ("required", "COMMAND")),
    ],
)
def test_bad_arguments(
    call: Call, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, arguments: tuple[str, ...], parts: tuple[str, ...]
) -> None:
    monkeypatch.chdir(tmp_path)
    status, out, err = call(*arguments)
    assert (status, out, len(err)) == (2, [], 1)
    assert err[0].startswith("simplexcub: ")
    for part in parts:
        assert part in err[0]
    assert list(tmp_path.iterdir()) == []


def corrupt(text: str, kind: str) -> str:
    """A JSON table damaged in one way."""
    digit = text.index("0.", text.index('"nodes"')) + 6
    return {
        "truncated": text[: len(text) // 2],
        "empty": "",
        "not a table": "[1, 2, 3]",
        "swapped digit": text[:digit] + ("1" if text[digit] != "1" else "2") + text[digit + 1 :],
        "other degree": text.replace('"degree": 3', '"degree": 5'),
        "no checksum": text[: text.index(',\n "sha256"')] + "\n}\n",
    }[kind]


@pytest.mark.parametrize(
    ("kind", "part"),
    [
        ("truncated", "cut short"),
        ("empty", "hold"),
        ("not a table", "JSON object"),
        ("swapped digit", "sha256"),
        ("other degree", "sha256"),
        ("no checksum", "sha256"),
    ],
)
@pytest.mark.parametrize("command", [("verify",), ("export", "--to", "csv")])
def test_damaged_tables(call: Call, tmp_path: Path, kind: str, part: str, command: tuple[str, ...]) -> None:
    path = tmp_path / "table.json"
    call(*SOLVE, "-o", path)
    path.write_text(corrupt(path.read_text(encoding="utf-8"), kind), encoding="utf-8")
    before = path.read_bytes()
    status, out, err = call(command[0], path, *command[1:])
    assert (status, out, len(err)) == (2, [], 1)
    assert str(path) in err[0]
    assert part in err[0]
    assert path.read_bytes() == before


@pytest.mark.parametrize(
    ("rows", "part"),
    [
        ("1,0,0.5\n0,1,0.4\n", "weights must sum to 1; got 0.9"),
        ("1,0.5,0.5\n0,1,0.5\n", "node 1 must sum to 1; got 1.5"),
        ("1.5,-0.5,0.5\n0,1,0.5\n", "at least 0; got -0.5"),
        ("1,0,nan\n0,1,0.5\n", "decimal number"),
        ("1\n1\n", "coordinates and a weight"),
    ],
)
def test_numbers_that_are_no_rule(call: Call, tmp_path: Path, rows: str, part: str) -> None:
    path = tmp_path / "rows.csv"
    path.write_text(rows, encoding="utf-8")
    status, out, err = call("verify", path, "--measure", "flat", "-N", 2)
    assert (status, out, len(err)) == (2, [], 1)
    assert part in err[0]


def test_a_file_that_is_not_text(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "noise.json"
    path.write_bytes(bytes(range(256)))
    status, out, err = call("verify", path)
    assert (status, out, len(err)) == (2, [], 1)


def test_a_table_of_another_measure(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "table.json"
    call(*SOLVE, "-o", path)
    status, out, err = call("verify", path, "--measure", "hilbert-schmidt", "-N", 2)
    assert (status, out, len(err)) == (2, [], 1)
    assert "flat" in err[0]


@pytest.fixture
def unspent(monkeypatch: pytest.MonkeyPatch) -> None:
    """Makes any search a failure of the test."""

    def search(*_: object, **__: object) -> Rule:
        raise AssertionError("the search was started")

    monkeypatch.setattr("simplexcub.cli.solve.solve", search)


@pytest.mark.usefixtures("unspent")
@pytest.mark.parametrize(
    ("path", "part"),
    [
        ("no/such/folder/rule.json", "no such file or directory"),
        ("folder.json", "a folder"),
        ("file.json/rule.json", "not a directory"),
        ("rule.docx", "ending must be one of"),
        ("rule", "ending must be one of"),
    ],
)
def test_an_output_that_cannot_be_written_is_refused_before_the_search(
    call: Call, tmp_path: Path, path: str, part: str
) -> None:
    (tmp_path / "folder.json").mkdir()
    (tmp_path / "file.json").write_text("kept", encoding="utf-8")
    status, out, err = call(*SOLVE, "-o", tmp_path / path)
    assert (status, out, len(err)) == (2, [], 1)
    assert path in err[0]
    assert part in err[0]
    assert sorted(p.name for p in tmp_path.iterdir()) == ["file.json", "folder.json"]
    assert (tmp_path / "file.json").read_text(encoding="utf-8") == "kept"


def test_a_file_without_write_permission_is_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "rule.json"
    path.write_text("kept", encoding="utf-8")
    # The administrator may write anywhere, so the answer of the system is stood in for.
    monkeypatch.setattr("os.access", lambda *_: False)
    with pytest.raises(InputError, match="without write permission"):
        require_writable(path)


def test_a_rule_is_printed_when_saving_fails_after_the_search(
    call: Call, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "rule.json"
    path.write_text("kept", encoding="utf-8")

    def full(rule: Rule, path: Path) -> None:
        raise InputError(f"{path} must be a path that can be written", "no space left on device")

    monkeypatch.setattr("simplexcub.cli.solve.save", full)
    status, out, err = call(*SOLVE, "-o", path)
    assert (status, len(err)) == (2, 1)
    assert "no space left" in err[0]
    assert out[0].startswith("simplexcub rule")
    assert path.read_text(encoding="utf-8") == "kept"


def test_export_refuses_an_output_before_reading_and_keeps_what_is_there(call: Call, tmp_path: Path) -> None:
    target = tmp_path / "kept.json"
    target.write_text("kept", encoding="utf-8")
    status, out, err = call("export", tmp_path / "missing.json", "--to", "json", "-o", target)
    assert (status, out, len(err)) == (2, [], 1)
    assert target.read_text(encoding="utf-8") == "kept"
    status, out, err = call("export", target, "--to", "json", "-o", tmp_path / "no" / "x.json")
    assert (status, out, len(err)) == (2, [], 1)
    assert "no/x.json" in err[0]


def test_a_binary_format_wants_a_file(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "table.json"
    call(*SOLVE, "-o", path)
    status, out, err = call("export", path, "--to", "npz")
    assert (status, out, len(err)) == (2, [], 1)
    assert ".npz" in err[0]
    assert call("export", path, "--to", "npz", "-o", tmp_path / "table.npz") == (0, [], [])


def test_a_full_disk_behind_standard_output_is_one_line(call: Call, monkeypatch: pytest.MonkeyPatch) -> None:
    def full(*_: object, **__: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("simplexcub.cli.tables.catalogue", full)
    status, out, err = call("tables")
    assert (status, out, len(err)) == (2, [], 1)
    assert "no space left on device" in err[0]
