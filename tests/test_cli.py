"""The commands, in this process: what they print, what they write, and that every option has its effect."""

from __future__ import annotations

import json
from dataclasses import replace
from decimal import Decimal
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
from conftest import Call

from simplexcub.cli import COMMANDS
from simplexcub.cli.output import HasText, ProgressLine
from simplexcub.measures import Measure, hilbert_schmidt, induced
from simplexcub.rule import Rule
from simplexcub.search import solve
from simplexcub.table import FORMATS, catalogue, read

HS3 = ("hilbert-schmidt", "-N", "3")


def value_of(lines: list[str], label: str) -> str:
    """What stands after `label` at the start of one of the lines."""
    return next(line.strip().removeprefix(label).strip() for line in lines if line.strip().startswith(label))


@pytest.fixture
def table(call: Call, tmp_path: Path) -> Path:
    """A saved Hilbert–Schmidt rule of degree 4."""
    path = tmp_path / "hs.json"
    assert call("solve", *HS3, "-t", 4, "--digits", 30, "-o", path)[0] == 0
    return path


def test_moments_prints_fraction_and_decimal(call: Call) -> None:
    status, out, err = call("moments", *HS3, "--exponents", "2,1,0")
    assert (status, err) == (0, [])
    assert out[0] == "E[λ1^2 λ2] = 1/33 ≈ 0." + "03" * 25 + "0"
    assert out[1].startswith("formula: ")
    assert len(out) == 2


@pytest.mark.parametrize(
    ("arguments", "printed"),
    [
        (("flat", "-N", "2", "--exponents", "1,0"), "E[λ1] = 1/2 = 0.5"),
        (("flat", "-N", "4", "--exponents", "0,0,0,0"), "E[1] = 1"),
        (("dirichlet", "--alpha", "1/2,0.5", "--exponents", "1,1"), "E[λ1 λ2] = 1/8 = 0.125"),
        (("dirichlet", "--alpha", "1,3", "--exponents", "0,2"), "E[λ2^2] = 3/5 = 0.6"),
        (("flat", "-N", "3", "--exponents", "1,0,0", "--digits", "3"), "E[λ1] = 1/3 ≈ 0.333"),
    ],
)
def test_moments_of_every_family_and_to_any_digits(call: Call, arguments: tuple[str, ...], printed: str) -> None:
    status, out, err = call("moments", *arguments)
    assert (status, out[0], err) == (0, printed, [])


def test_moments_takes_the_environment_size(call: Call) -> None:
    _, out, _ = call("moments", "induced", "-N", 2, "-K", 5, "--exponents", "2,0")
    assert out[:1] == [f"E[λ1^2] = {induced(2, 5).moment((2, 0))} ≈ 0.{'318' + '18' * 23 + '2'}"]


def test_moments_prints_fractions_beyond_the_interpreters_limit_on_integers(call: Call) -> None:
    status, out, _ = call("moments", "flat", "-N", 2, "--exponents", "9000,9000", "--digits", 5)
    assert status == 0
    assert len(out[0]) > 5000


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


def test_verify_confirms_what_solve_saved(call: Call, table: Path) -> None:
    status, out, err = call("verify", table)
    assert (status, err) == (0, [])
    assert value_of(out, "verified") == "yes"
    assert "fails at degree 5" in value_of(out, "exact")


def test_verify_notices_a_nudge_in_the_twentieth_digit(call: Call, table: Path, tmp_path: Path) -> None:
    _, out, _ = call("export", table, "--to", "csv")
    rows = [line.split(",") for line in out if not line.startswith("#")][1:]
    for nudge, degree in ((Decimal(0), 4), (Decimal("1e-20"), 0)):
        changed = [[*node, str(Decimal(weight))] for *node, weight in rows]
        changed[0][-1] = str(Decimal(rows[0][-1]) + nudge)
        changed[1][-1] = str(Decimal(rows[1][-1]) - nudge)
        bare = tmp_path / "bare.csv"
        bare.write_text("\n".join(",".join(row) for row in changed), encoding="utf-8")
        _, found, _ = call("verify", bare, "--measure", *HS3)
        assert value_of(found, "exact").startswith(f"to degree {degree},")


def test_verify_finds_the_degree_of_a_table_of_bare_numbers(call: Call, tmp_path: Path) -> None:
    simpson = tmp_path / "simpson.csv"
    simpson.write_text("0,1,0.166666666667\n0.5,0.5,0.666666666667\n1,0,0.166666666667\n", encoding="utf-8")
    status, out, _ = call("verify", simpson, "--measure", "flat", "-N", 2)
    assert status == 0
    assert value_of(out, "exact").startswith("to degree 3,")
    status, out, _ = call("verify", simpson, "--measure", "dirichlet", "--alpha", "2,2")
    assert value_of(out, "exact").startswith("to degree 1,")
    status, out, _ = call("verify", simpson, "--measure", "induced", "-N", 2, "-K", 4)
    assert value_of(out, "measure") == str(induced(2, 4))


def test_verify_status_is_one_for_a_false_claim(call: Call, table: Path) -> None:
    record = json.loads(table.read_text(encoding="utf-8"))
    text = table.with_suffix(".txt")
    assert call("export", table, "--to", "text", "-o", text)[0] == 0
    page = text.read_text(encoding="utf-8")
    text.write_text(page.replace("degree ≤ 4", "degree ≤ 5").replace("degree 4", "degree 5"), encoding="utf-8")
    status, out, err = call("verify", text)
    assert status == 1
    assert value_of(out, "verified") == "no"
    assert len(err) == 1
    assert "degree 5" in err[0]
    assert record["degree"] == 4


@pytest.mark.parametrize("to", [name for name, form in FORMATS.items() if not form.binary])
def test_export_prints_what_it_would_save(call: Call, table: Path, tmp_path: Path, to: str) -> None:
    status, out, err = call("export", table, "--to", to)
    assert (status, err) == (0, [])
    target = tmp_path / "saved.out"
    assert call("export", table, "--to", to, "-o", target) == (0, [], [])
    assert target.read_text(encoding="utf-8").splitlines() == out


def test_export_states_the_degree_that_a_table_of_bare_numbers_was_found_to_have(call: Call, tmp_path: Path) -> None:
    simpson = tmp_path / "simpson.csv"
    simpson.write_text("0,1,0.166666666667\n0.5,0.5,0.666666666667\n1,0,0.166666666667\n", encoding="utf-8")
    status, out, _ = call("export", simpson, "--to", "json", "--measure", "flat", "-N", 2)
    assert status == 0
    assert json.loads("\n".join(out))["degree"] == 3


@pytest.mark.parametrize(
    ("arguments", "printed"),
    [
        ((*HS3, "purity"), "3/5 = 0.6"),
        ((*HS3, "linear"), "2/5 = 0.4"),
        (("flat", "-N", "2", "tsallis-3"), "1/4 = 0.25"),
        (("induced", "-N", "2", "-K", "3", "purity"), "5/7 ≈ 0." + ("714285" * 9)[:50]),
        (("dirichlet", "--alpha", "1,3", "purity"), "7/10 = 0.7"),
    ],
)
def test_average_of_a_polynomial_is_exact(call: Call, arguments: tuple[str, ...], printed: str) -> None:
    assert call("average", *arguments) == (0, [printed, "exact"], [])


def test_average_prints_value_error_and_cost(call: Call) -> None:
    status, out, err = call("average", "flat", "-N", 2, "von-neumann", "--tol", "1e-4")
    assert (status, err) == (0, [])
    error = float(out[1].removeprefix("estimated error "))
    assert abs(float(out[0]) - 0.5) <= error <= 1e-4
    assert "evaluations" in out[2]


def test_average_that_misses_the_tolerance_still_prints_the_value(call: Call) -> None:
    status, out, err = call("average", "flat", "-N", 2, "largest", "--tol", "1e-12")
    assert status == 1
    error = float(out[1].removeprefix("estimated error "))
    assert 1e-12 < error < 1e-3
    assert abs(float(out[0]) - 0.75) <= error
    assert len(err) == 1
    assert "tolerance 1e-12 was not met" in err[0]


def test_tables_lists_all_that_is_shipped(call: Call) -> None:
    status, out, err = call("tables")
    assert (status, err) == (0, [])
    assert len(out) == 1 + len(catalogue()) > 80
    assert " ".join(out[0].split()) == "measure space degree nodes bound efficiency published symmetry digits"


def test_tables_can_be_narrowed_in_any_order(call: Call) -> None:
    _, out, _ = call("tables", *HS3)
    assert call("tables", "-N", 3, "hilbert-schmidt") == (0, out, [])
    degrees = [int(line.split()[5]) for line in out[1:]]
    assert degrees == sorted(degrees)
    assert set(degrees) >= set(range(1, 15))
    assert all(line.startswith("hilbert-schmidt, N = 3 ") for line in out[1:])


def test_tables_show_efficiency_and_the_published_mark(call: Call) -> None:
    _, out, _ = call("tables", "flat", "-N", 4)
    rows = {tuple(line.split()[5:]) for line in out[1:]}
    # Witherden & Vincent, Comput. Math. Appl. 69 (2015) 1232, from memory.
    assert ("4", "14", "10", "0.71", "14", "full", "full", "50") in rows
    _, out, _ = call("tables", *HS3)
    assert {line.split()[-3] for line in out[1:]} == {"–"}


def test_marks_without_symmetry_are_shown_beside_rules_without_it(call: Call, monkeypatch: pytest.MonkeyPatch) -> None:
    lines = [
        replace(item, symmetry="product-2-2", nodes=11)
        for item in catalogue("flat", N=4)
        if (item.degree, item.symmetry) == (4, "full")
    ]
    monkeypatch.setattr("simplexcub.cli.tables.catalogue", lambda *_, **__: lines)
    # Jaśkowiec & Sukumar, Int. J. Numer. Methods Eng. 121 (2020) 2418, from memory.
    (_, line) = call("tables")[1]
    assert line.split()[5:] == ["4", "11", "10", "0.91", "11", "any", "product-2-2", "50"]


def test_tables_status_is_one_where_nothing_is_shipped(call: Call) -> None:
    status, out, err = call("tables", "-N", 77)
    assert (status, out, len(err)) == (1, [], 1)


@pytest.mark.parametrize("command", COMMANDS)
def test_help_explains_every_command_with_an_example(call: Call, command: str) -> None:
    status, out, err = call(command, "--help")
    assert (status, err) == (0, [])
    assert out[-2] == "example:"
    assert out[-1].startswith(f"  simplexcub {command} ")


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


def test_exact_values_survive_the_printing(call: Call) -> None:
    _, out, _ = call("moments", *HS3, "--exponents", "4,1,2", "--digits", 200)
    fraction, decimal = out[0].split(" = ")[1].split(" ≈ ")
    assert abs(Fraction(fraction) - Fraction(decimal)) < Fraction(1, 10**200)
