"""`simplexcub solve`: what it prints and saves, and that every option has its effect."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from conftest import Call

from simplexcub.cli.output import HasText, ProgressLine
from simplexcub.measures import Measure, hilbert_schmidt
from simplexcub.rule import Rule
from simplexcub.search import solve
from simplexcub.table import read

HS3 = ("hilbert-schmidt", "-N", "3")


def value_of(lines: list[str], label: str) -> str:
    """What stands after `label` at the start of one of the lines."""
    return next(line.strip().removeprefix(label).strip() for line in lines if line.strip().startswith(label))


def test_solve_prints_the_verified_table(call: Call) -> None:
    status, out, err = call("solve", *HS3, "-t", 4)
    assert (status, err) == (0, [])
    assert value_of(out, "status") == "verified"
    assert value_of(out, "exact for").endswith("degree ≤ 4")
    assert value_of(out, "digits") == "50"


def test_solve_saves_and_sums_up_in_one_line(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "rule.json"
    status, out, err = call("solve", *HS3, "-t", 4, "--output", path)
    assert (status, err) == (0, [])
    rule = read(path)
    (line,) = out
    for part in (str(hilbert_schmidt(3)), "all", "degree 4", f"{len(rule)} nodes", "50 digits", "residual", str(path)):
        assert part in line
    assert rule.verification is not None
    assert f"at least {rule.verification.lower_bound} needed (efficiency 1.00)" in line
    assert rule.verification.max_residual in line


@pytest.mark.parametrize(
    ("options", "field", "value"),
    [
        (("--digits", "20"), "digits", 20),
        *((("--symmetry", name), "symmetry", name) for name in ("full", "none", "cyclic", "stabiliser", "product-1-2")),
        (("--space", "all"), "space", "all"),
        (("--degree", "3"), "degree", 3),
    ],
)
def test_solve_options_show_in_the_rule(
    call: Call, tmp_path: Path, options: tuple[str, ...], field: str, value: object
) -> None:
    path = tmp_path / "rule.json"
    assert call("solve", "flat", "-N", 3, "-t", 2, *options, "-o", path)[0] == 0
    assert getattr(read(path), field) == value


def test_solve_follows_the_seed_and_nothing_else(call: Call, tmp_path: Path) -> None:
    def saved(seed: int, name: str, *more: object) -> dict[str, object]:
        # Degree 3 on the triangle leaves one unknown free, so other starts end at other rules.
        call("solve", "flat", "-N", 3, "-t", 3, "--digits", 20, "--seed", seed, *more, "-o", tmp_path / name)
        record: dict[str, object] = json.loads((tmp_path / name).read_text(encoding="utf-8"))
        return record

    first, again = saved(0, "a.json"), saved(0, "b.json")
    assert first["nodes"] == again["nodes"]
    other = saved(5, "c.json")
    assert first["provenance"] != other["provenance"]
    assert first["nodes"] != other["nodes"]


def test_solve_with_an_ended_budget_offers_the_product_rule_and_says_so(call: Call) -> None:
    status, out, err = call("solve", "flat", "-N", 3, "-t", 9, "--digits", 20, "--budget", "0.000001s")
    assert status == 0
    assert value_of(out, "method") == "conical product"
    (line,) = err
    assert "conical product" in line
    assert "--budget" in line


@pytest.mark.parametrize("arguments", [("flat", "-N", "3", "--symmetry", "none"), ("dirichlet", "--alpha", "1,2,3")])
def test_solve_apologises_for_a_product_rule_under_every_symmetry(call: Call, arguments: tuple[str, ...]) -> None:
    status, out, err = call("solve", *arguments, "-t", 9, "--digits", 20, "--budget", "0.000001s")
    assert (status, len(err)) == (0, 1)
    assert "conical product" in err[0]
    assert value_of(out, "method") == "conical product"


@pytest.mark.parametrize(
    ("arguments", "nodes", "of"),
    [
        # Jaśkowiec & Sukumar, Int. J. Numer. Methods Eng. 121 (2020) 2418, from memory.
        ("flat -N 4 -t 4 --symmetry none", 11, 10),
        # K. Gatermann, Computing 40 (1988) 229, from memory; also Möller's bound.
        ("flat -N 3 -t 7 --symmetry best", 12, 12),
    ],
)
def test_solve_reaches_published_counts_without_full_symmetry(
    call: Call, monkeypatch: pytest.MonkeyPatch, arguments: str, nodes: int, of: int
) -> None:
    class Content(ProgressLine):
        """Interrupts the search, which would try for fewer nodes for a while, once the mark is reached."""

        def __call__(self, progress: HasText) -> None:
            if progress.text.startswith(f"best so far {nodes} nodes"):
                raise KeyboardInterrupt

    monkeypatch.setattr("simplexcub.cli.solve.ProgressLine", Content)
    monkeypatch.setattr("simplexcub.search.driver.ABREAST", 1)  # the first results are there sooner
    status, out, err = call("solve", *arguments.split(), "--budget", "10m")
    assert (status, err) == (0, [])
    assert value_of(out, "status") == "verified"
    assert value_of(out, "nodes") == str(nodes)
    assert value_of(out, "efficiency") == f"{of / nodes:.2f} = {of}/{nodes}, bound / nodes"


def test_solve_resumes_from_a_folder(call: Call, tmp_path: Path) -> None:
    command = ("solve", "flat", "-N", 3, "-t", 4, "--digits", 20, "--resume", tmp_path / "search")
    status, first, err = call(*command)
    assert (status, err) == (0, [])
    files = sorted((tmp_path / "search").iterdir())
    before = [path.stat().st_mtime_ns for path in files]
    assert call(*command) == (0, first, [])
    assert sorted((tmp_path / "search").iterdir()) == files
    assert [path.stat().st_mtime_ns for path in files] == before


@pytest.mark.parametrize(
    ("text", "seconds"), [("90", 90.0), ("60s", 60.0), ("2m", 120.0), ("1.5h", 5400.0), ("0.5", 0.5)]
)
def test_durations(call: Call, monkeypatch: pytest.MonkeyPatch, text: str, seconds: float) -> None:
    seen = spy_on_search(monkeypatch)
    assert call("solve", "flat", "-N", 2, "-t", 1, "--budget", text)[0] == 0
    assert [options["budget"] for options in seen] == [seconds]


def test_jobs_reach_the_search(call: Call, monkeypatch: pytest.MonkeyPatch) -> None:
    seen = spy_on_search(monkeypatch)
    assert call("solve", "flat", "-N", 2, "-t", 1, "--jobs", 3)[0] == 0
    assert [options["jobs"] for options in seen] == [3]


@pytest.mark.parametrize(
    ("arguments", "name", "value"),
    [
        (("--symmetry", "best"), "symmetry", "best"),
        (("--resume", "folder"), "resume", Path("folder")),
        ((), "resume", None),
        ((), "symmetry", "full"),
        ((), "jobs", 1),
        ((), "executor", None),
        ((), "budget", 60.0),
    ],
)
def test_options_reach_the_search(
    call: Call, monkeypatch: pytest.MonkeyPatch, arguments: tuple[str, ...], name: str, value: object
) -> None:
    seen = spy_on_search(monkeypatch)
    assert call("solve", "flat", "-N", 2, "-t", 1, *arguments)[0] == 0
    assert [options[name] for options in seen] == [value]


def spy_on_search(monkeypatch: pytest.MonkeyPatch) -> list[dict[str, Any]]:
    """Lets the search run as usual and keeps the options of every call."""
    seen: list[dict[str, Any]] = []

    def spy(measure: Measure, degree: int, **options: Any) -> Rule:
        seen.append(options)
        return solve(measure, degree, **options)

    monkeypatch.setattr("simplexcub.cli.solve.solve", spy)
    return seen
