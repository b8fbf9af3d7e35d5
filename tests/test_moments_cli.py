"""`simplexcub moments`: every quantity, its formula, tables in every format, and refusals in one line."""

from __future__ import annotations

import csv
import json
from fractions import Fraction
from pathlib import Path

import pytest
from conftest import Call

from simplexcub.measures import bures, flat, from_parameters, hilbert_schmidt, ordered
from simplexcub.moments.partitions import partitions

HS4 = ("hilbert-schmidt", "-N", 4)


def fraction_of(line: str) -> Fraction:
    return Fraction(line.split(" = ")[1].split(" ≈ ")[0])


def test_bures_moment_agrees_with_sommers_and_zyczkowski(call: Call) -> None:
    """J. Phys. A 37 (2004) 8457: (5N² + 1)/(2N(N² + 2)) for the purity, a fourth of it for one eigenvalue."""
    status, out, err = call("moments", "bures", "-N", 4, "--exponents", "2,0,0,0")
    assert (status, err) == (0, [])
    assert fraction_of(out[0]) == Fraction(81, 8 * 18) / 4
    assert out[1].startswith("formula: E[λ^a] = M(a)/M(0)/(8)_|a|")
    assert out[1].endswith("x_i = a_i + σ_i + 1/2, k(x, y) = (x − y)/(x + y)")


def test_entropy_is_pages_rational(call: Call) -> None:
    page = sum(Fraction(1, k) for k in range(5, 17)) - Fraction(3, 8)
    _, out, _ = call("moments", *HS4, "--entropy", "--digits", 12)
    assert fraction_of(out[0]) == page
    assert out[0].startswith("E[−Σ λ ln λ] = ")
    assert out[1].startswith("formula: d/dq at q = 1 of E[Σ λ^q] = 1/(16)_q Σ_(s<4)")


def test_large_induced_power_sums_answer(call: Call) -> None:
    _, out, _ = call("moments", "induced", "-N", 1000, "-K", 2000, "--power-sums", "3,2,2", "--digits", 5)
    assert out[0].startswith("E[p3 p2 p2] = ")
    assert "χ^ν_μ" in out[1]


@pytest.mark.parametrize(
    ("arguments", "first"),
    [
        (("bures", "-N", 2, "--entropy", "--digits", 10), "E[−Σ λ ln λ] = -7/6 + 2 ln 2 ≈ 0.2196276945"),
        (("flat", "-N", 3, "--power", "1/2", "--digits", 10), "E[Σ λ^(1/2)] ≈ 1.600000000"),
        (("flat", "-N", 2, "--power", "-1/2", "--digits", 5), "E[Σ λ^(-1/2)] ≈ 4.0000"),
        (("flat", "-N", 2, "--power", "3"), "E[Σ λ^3] = 1/2 = 0.5"),
        (("induced", "-N", 2, "-K", 4, "--power", "-1"), "E[Σ λ^-1] = 7"),
        (("flat", "-N", 2, "--log", 1), "E[Σ λ ln λ] = -1/2 = -0.5"),
        (("flat", "-N", 2, "--ordered"), "E[λ1] = 3/4 = 0.75"),
        (("flat", "-N", 2, "--ordered", "--exponents", "0,1"), "E[λ2] = 1/4 = 0.25"),
        (("flat", "-N", 2, "--power-sums", "2"), "E[p2] = 2/3 ≈ 0." + "6" * 49 + "7"),
        (("bures-hall", "-N", 2, "--exponent", "1/2", "--exponents", "2,0"), "E[λ1^2] = 3/8 = 0.375"),
        (("orthogonal", "-N", 2, "-K", 2, "--power-sums", "2", "--digits", 3), "E[p2] = 5/6 ≈ 0.833"),
        (
            ("beta", "-N", 2, "--beta", "1", "--exponent", "-1/2", "--power-sums", "2", "--digits", 3),
            "E[p2] = 5/6 ≈ 0.833",
        ),
        (
            ("polynomial", "--alpha", "1,1", "--polynomial", "(x1 - x2)^2", "--exponents", "2,0"),
            "E[λ1^2] = 2/5 = 0.4",
        ),
    ],
)
def test_every_quantity(call: Call, arguments: tuple[object, ...], first: str) -> None:
    status, out, err = call("moments", *arguments)
    assert (status, err) == (0, [])
    assert out[0] == first
    assert out[-1].startswith("formula: ")


def test_ordered_alone_prints_the_mean_of_each_eigenvalue(call: Call) -> None:
    _, out, _ = call("moments", "hilbert-schmidt", "-N", 3, "--ordered", "--digits", 12)
    assert out[0] == "E[λ1] = 313/432 ≈ 0.724537037037"
    assert sum(fraction_of(line) for line in out[:3]) == 1
    assert len(out) == 4


@pytest.mark.parametrize("route", ["alternant", "expansion", "loop", "schur"])
def test_each_route_prints_the_same_value_and_its_own_formula(call: Call, route: str) -> None:
    for quantity in (("--exponents", "3,1,0,0"), ("--power-sums", "3,2")):
        _, plain, _ = call("moments", *HS4, *quantity)
        _, out, _ = call("moments", *HS4, *quantity, "--route", route)
        assert out[0] == plain[0]
        assert (out[1] == plain[1]) == (route == "alternant")


def test_huge_entropies_are_given_by_their_digits(call: Call) -> None:
    """Page's sum for N = K = 1000, whose fraction has half a million digits: ln N − 1/2 to 5 digits."""
    _, out, _ = call("moments", "hilbert-schmidt", "-N", 1000, "--entropy", "--digits", 6)
    assert out[0].split(" ≈ ")[-1].split(" = ")[-1].startswith("6.40776")
    assert len(out[0]) < 5000


def test_table_lists_one_moment_of_each_orbit(call: Call) -> None:
    _, out, _ = call("moments", "bures", "-N", 3, "--table", 4, "--digits", 8)
    rows = out[4:]
    assert len(rows) == sum(len(list(partitions(d, 3))) for d in range(1, 5))
    assert rows[1].split()[0] == "λ1^2"
    assert out[1].startswith("formula: ")


@pytest.mark.parametrize("ending", ["json", "csv", "tex", "md", "txt"])
def test_tables_hold_the_moments_in_every_format(call: Call, tmp_path: Path, ending: str) -> None:
    path = tmp_path / f"moments.{ending}"
    assert call("moments", "bures", "-N", 3, "--table", 3, "--digits", 20, "-o", path) == (0, [], [])
    text = path.read_text(encoding="utf-8")
    for degree in (1, 2, 3):
        for mu in partitions(degree, 3):
            assert str(bures(3).moment(mu + (0,) * (3 - len(mu)))) in text


def test_json_and_csv_tables_read_back(call: Call) -> None:
    _, out, _ = call("moments", "dirichlet", "--alpha", "1/2,2", "--table", 3, "--to", "json", "--digits", 9)
    record = json.loads("\n".join(out))
    measure = from_parameters(record["measure"])
    assert (record["format"], record["degree"], record["digits"]) == ("simplexcub-moments", 3, 9)
    assert len(record["moments"]) == 2 + 3 + 4
    for row in record["moments"]:
        assert measure.moment(row["exponents"]) == Fraction(row["fraction"])
        assert abs(Fraction(row["decimal"]) - Fraction(row["fraction"])) < Fraction(1, 10**8)
    _, out, _ = call("moments", "flat", "-N", 3, "--ordered", "--table", 2, "--to", "csv")
    rows = list(csv.DictReader(line for line in out if not line.startswith("#")))
    assert len(rows) == 3 + 6
    for row in rows:
        exponents = [int(row[f"a_{i}"]) for i in (1, 2, 3)]
        assert ordered(flat(3)).moment(exponents) == Fraction(row["fraction"])


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (HS4, ("exactly one of --exponents", "must be given", "got none")),
        ((*HS4, "--entropy", "--power", "2"), ("must be given", "--power and --entropy")),
        ((*HS4, "--entropy", "--to", "csv"), ("must come with --table",)),
        ((*HS4, "--entropy", "-o", "x.csv"), ("must come with --table",)),
        ((*HS4, "--entropy", "--route", "loop"), ("--route must come with",)),
        ((*HS4, "--exponents", "1,0,0,0", "--route", "x"), ("route must be one of alternant",)),
        ((*HS4, "--power", "-1"), ("q must be above -1", "diverges")),
        ((*HS4, "--power", "x"), ("q must be a finite real number", "'x'")),
        ((*HS4, "--power-sums", "0"), ("positive integer powers",)),
        ((*HS4, "--log", "0"), ("k must be an integer of at least 1",)),
        ((*HS4, "--table", "0"), ("degree of a table must be at least 1",)),
        ((*HS4, "--table", "100"), ("at most 20000 rows",)),
        ((*HS4, "--table", "2", "-o", "x.doc"), ("must end in one of .txt", ".doc")),
        ((*HS4, "--table", "2", "-o", "no/such/folder.csv"), ("must be a path that can be written",)),
        ((*HS4, "--exponent", "1", "--entropy"), ("measure hilbert-schmidt must have no exponent",)),
        (("bures", "-N", 3, "--ordered"), ("polynomial density on the chamber",)),
        (("bures-hall", "-N", 3, "--exponent", "-1", "--entropy"), ("exponent must be above -1",)),
        (("bures-hall", "-N", 3, "--entropy"), ("one of K and exponent",)),
        (("beta", "-N", 3, "--entropy"), ("measure beta needs N and beta and exponent",)),
        (("orthogonal", "-N", 3, "-K", 3, "--entropy"), ("closed form",)),
        (("polynomial", "--alpha", "1,1", "--polynomial", "x1 - x2", "--entropy"), ("must not be negative",)),
        (("polynomial", "--alpha", "1,1", "--polynomial", "f(x1)", "--entropy"), ("numbers, x1 … xN",)),
    ],
)
def test_bad_requests_are_refused_in_one_line(
    call: Call, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, arguments: tuple[object, ...], words: tuple[str, ...]
) -> None:
    monkeypatch.chdir(tmp_path)
    status, out, err = call("moments", *arguments)
    assert (status, out, len(err)) == (2, [], 1)
    assert all(word in err[0] for word in words)
    assert not list(tmp_path.iterdir())


def test_exact_values_survive_the_printing(call: Call) -> None:
    _, out, _ = call("moments", *HS4, "--power-sums", "4,3", "--digits", 100)
    fraction, decimal = out[0].split(" = ")[1].split(" ≈ ")
    assert Fraction(fraction) == hilbert_schmidt(4).power_sum_moment((4, 3))
    assert abs(Fraction(decimal) - Fraction(fraction)) < Fraction(1, 10**100)
