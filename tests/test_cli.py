"""The commands, in this process: what they print, what they write, and that every option has its effect."""

from __future__ import annotations

import json
from dataclasses import replace
from decimal import Decimal
from fractions import Fraction
from pathlib import Path

import pytest
from conftest import Call

from simplexcub.cli import COMMANDS
from simplexcub.measures import induced
from simplexcub.table import FORMATS, catalogue
from simplexcub.table.record import SPACES

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
    status, out, err = call("average", "flat", "-N", 2, "largest", "--tol", "1e-17")
    assert status == 1
    error = float(out[1].removeprefix("estimated error "))
    assert 1e-17 < error < 1e-12
    assert abs(float(out[0]) - 0.75) <= error
    assert len(err) == 1
    assert "tolerance 1e-17 was not met" in err[0]
    assert "double precision" in err[0]


def test_tables_lists_all_that_is_shipped(call: Call) -> None:
    status, out, err = call("tables")
    assert (status, err) == (0, [])
    assert len(out) == 1 + len(catalogue()) > 80
    assert " ".join(out[0].split()) == (
        "measure N space symmetry degree nodes bound efficiency published digits proven special name"
    )


def test_tables_can_be_narrowed_in_any_order(call: Call) -> None:
    _, out, _ = call("tables", *HS3)
    assert call("tables", "-N", 3, "hilbert-schmidt") == (0, out, [])
    degrees = [int(line.split()[4]) for line in out[1:] if line.split()[2] == "all" and "-full-t" in line]
    assert degrees == sorted(degrees)
    assert set(degrees) >= set(range(1, 15))
    assert {tuple(line.split()[:3]) for line in out[1:]} == {("hilbert-schmidt", "3", s) for s in SPACES}


def test_tables_show_efficiency_and_the_published_mark(call: Call) -> None:
    _, out, _ = call("tables", "flat", "-N", 4)
    rows = {tuple(line.split()[3:-1]) for line in out[1:]}
    # Witherden & Vincent, Comput. Math. Appl. 69 (2015) 1232, from memory.
    assert ("full", "4", "14", "10", "0.71", "14", "full", "50", "yes") in rows
    _, out, _ = call("tables", *HS3)
    assert {line.split()[8] for line in out[1:]} == {"–"}


def test_marks_without_symmetry_are_shown_beside_rules_without_it(call: Call, monkeypatch: pytest.MonkeyPatch) -> None:
    lines = [
        replace(item, symmetry="product-2-2", nodes=11)
        for item in catalogue("flat", N=4)
        if (item.degree, item.space, item.symmetry, item.kind.told) == (4, "all", "full", "")
    ]
    monkeypatch.setattr("simplexcub.cli.tables.catalogue", lambda *_, **__: lines)
    # Jaśkowiec & Sukumar, Int. J. Numer. Methods Eng. 121 (2020) 2418, from memory.
    (_, line) = call("tables")[1]
    assert line.split()[3:-1] == ["product-2-2", "4", "11", "10", "0.91", "11", "any", "50", "yes"]


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
    ("command", "use"),
    [
        ("verify", "check against this measure: flat,"),
        ("export", "measure of tables that name none: flat,"),
        ("draw", "measure of --convergence, or of a table that names none: flat,"),
    ],
)
def test_help_says_what_the_measure_is_for(call: Call, command: str, use: str) -> None:
    assert f"--measure MEASURE {use}" in " ".join(" ".join(call(command, "--help")[1]).split())


def test_exact_values_survive_the_printing(call: Call) -> None:
    _, out, _ = call("moments", *HS3, "--exponents", "4,1,2", "--digits", 200)
    fraction, decimal = out[0].split(" = ")[1].split(" ≈ ")
    assert abs(Fraction(fraction) - Fraction(decimal)) < Fraction(1, 10**200)
