"""`simplexcub average` as it is typed: names, expressions, code of the user's own, several functions, and refusals."""

from __future__ import annotations

import math
import re
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest
from conftest import Call, Run

from simplexcub.measures import bures, flat, hilbert_schmidt

HS2 = ("hilbert-schmidt", "-N", 2)


def numbers(out: list[str]) -> tuple[float, float]:
    """Value and error of the first two lines."""
    return float(out[0]), float(out[1].removeprefix("estimated error "))


def test_page_entropy_beside_its_exact_value(call: Call) -> None:
    """Σ_{k=5}^{16} 1/k − 3/8 (Page 1993)."""
    status, out, err = call("average", "hilbert-schmidt", "-N", 4, "von-neumann", "--tol", "1e-8")
    page = sum((Fraction(1, k) for k in range(5, 17)), Fraction(0)) - Fraction(3, 8)
    value, error = numbers(out)
    assert (status, err) == (0, [])
    assert abs(value - float(page)) <= error <= 1e-8
    assert out[3].startswith(f"exact mean {page.numerator}/{page.denominator} ≈ 0.9223956598956598956")
    assert out[4] == "unit nats"


def test_an_expression_over_bures_agrees_with_samples(call: Call) -> None:
    """10^5 seeded samples here, five standard errors; 10^7 in tests/benchmarks/samples.py."""
    status, out, err = call("average", "bures", "-N", 3, "max(x)", "--tol", "1e-6")
    value, error = numbers(out)
    sampled = bures(3).sample(np.random.default_rng(11), 100_000).max(axis=1)
    assert (status, err) == (0, [])
    assert error <= 1e-6
    assert abs(value - sampled.mean()) <= 5 * sampled.std() / math.sqrt(len(sampled)) + error


def test_the_same_by_name_and_by_expression(call: Call) -> None:
    named = call("average", "bures", "-N", 3, "fidelity")[1]
    written = call("average", "bures", "-N", 3, "sum(sqrt(x))**2/3")[1]
    assert numbers(named)[0] == pytest.approx(numbers(written)[0], abs=2e-6)


def test_components_of_a_spectrum_are_given_the_largest_first(call: Call) -> None:
    assert numbers(call("average", *HS2, "x1 - x2")[1])[0] == pytest.approx(3 / 4)
    assert numbers(call("average", "flat", "-N", 2, "x1 - x2")[1])[0] == pytest.approx(0, abs=1e-9)
    assert numbers(call("average", *HS2, "x1", "--space", "all")[1])[0] == pytest.approx(1 / 2)


def test_bits(call: Call) -> None:
    status, out, _ = call("average", *HS2, "von-neumann", "--bits")
    assert status == 0
    assert numbers(out)[0] == pytest.approx(1 / (3 * math.log(2)), abs=1e-6)
    assert out[3].startswith("exact mean (1/3)/ln 2 ≈ 0.4808983469629878")
    assert out[4] == "unit bits"


@pytest.mark.parametrize(
    ("text", "place", "part"),
    [
        ("sum(sqrt(x))**2 - y", 18, "names must be x, x1 to x2"),
        ("sum(x", 3, "correctly bracketed"),
        ("x1 + exec(x)", 5, "functions must be among"),
        ("x**2", 0, "one number per point"),
    ],
)
def test_a_bad_expression_is_refused_with_a_caret_at_the_place(call: Call, text: str, place: int, part: str) -> None:
    status, out, err = call("average", "flat", "-N", 2, text)
    assert (status, out, len(err)) == (2, [], 3)
    assert part in err[0]
    assert err[1:] == [f"  {text}", "  " + " " * place + "^"]


@pytest.mark.parametrize(
    ("arguments", "parts"),
    [
        ((*HS2,), ("a FUNCTION is required", "--python")),
        ((*HS2, "purity", "purity"), ("every FUNCTION must be given once",)),
        ((*HS2, "purity", "--bits"), ("bits must be asked of an entropy", "'purity'")),
        ((*HS2, "max(x)", "--bits"), ("--bits must come with a named entropy", "log2")),
        ((*HS2, "purity", "--python", "a:b"), ("--python must stand in place of FUNCTION",)),
        ((*HS2, "--python", "ab"), ("--python must be MODULE:FUNCTION", "'ab'")),
        ((*HS2, "--python", "no_such_module:f"), ("no_such_module must be a module", "ModuleNotFoundError")),
        ((*HS2, "--python", "math:tau"), ("math must have a function tau", "6.28")),
        ((*HS2, "purity", "--moments", 9), ("orders must be an integer from 2 to 8", "got 9")),
        ((*HS2, "purity", "--cdf", "0.5,a"), ("--cdf must be numbers", "'a'")),
        ((*HS2, "purity", "--max-evaluations", 0), ("max_evaluations must be", "got 0")),
        ((*HS2, "largest", "--seed", -1), ("seed must be", "got -1")),
        ((*HS2, "largest", "--space", "most"), ("--space", "'most'")),
        ((*HS2, "gap-2"), ("at least 3 components", "got 2")),
        ((*HS2, "sqrt"), ("function must be one of", "or an expression in x")),
    ],
)
def test_refusals_are_one_line(call: Call, arguments: tuple[object, ...], parts: tuple[str, ...]) -> None:
    status, out, err = call("average", *arguments)
    assert (status, out, len(err)) == (2, [], 1)
    for part in parts:
        assert part in err[0]


def test_python_code_of_the_users_own_is_run_from_the_current_folder(run_command: Run, tmp_path: Path) -> None:
    wave, pair = "def wave(x): return np.exp(2j * x[:, 0])", "def pair(x): return x[:, :2]"
    source = f"import numpy as np\n\n{wave}\n\n{pair}\n"
    (tmp_path / "mine.py").write_text(source, encoding="utf-8")
    done = run_command("average", "flat", "-N", "2", "--python", "mine:wave")
    assert (done.returncode, done.stderr) == (0, "")
    real, imaginary = (float(part) for part in done.stdout.splitlines()[0].rstrip("i").split())
    exact = (np.exp(2j) - 1) / 2j
    assert abs(real - exact.real) + abs(imaginary - exact.imag) < 1e-6
    done = run_command("average", "flat", "-N", "2", "--python", "mine:pair")
    assert done.stdout.splitlines()[0].split() == ["0.5", "0.5"]
    assert "estimated errors" in done.stdout


def test_code_that_fails_is_reported_in_one_line(run_command: Run, tmp_path: Path) -> None:
    (tmp_path / "mine.py").write_text("def f(x):\n    return x[0].nothing\n", encoding="utf-8")
    done = run_command("average", "flat", "-N", "2", "--python", "mine:f")
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.count("\n") == 1
    assert "f must not raise; got AttributeError" in done.stderr
    (tmp_path / "broken.py").write_text("1/0\n", encoding="utf-8")
    done = run_command("average", "flat", "-N", "2", "--python", "broken:f")
    assert done.returncode == 2
    assert "ZeroDivisionError" in done.stderr


def test_the_help_says_that_python_runs_code(call: Call) -> None:
    status, out, _ = call("average", "--help")
    assert status == 0
    assert "runs its code" in re.sub(r"\s+", " ", " ".join(out))


def test_a_budget_of_evaluations_ends_with_the_best_value_and_status_1(call: Call) -> None:
    status, out, err = call("average", "flat", "-N", 3, "rank-0.2", "--tol", "1e-9", "--max-evaluations", 3000)
    value, error = numbers(out)
    assert (status, len(err)) == (1, 1)
    assert "tolerance 1e-09 was not met" in err[0]
    assert abs(value - 3 * (1 - 0.2) ** 2) <= error  # P(λ_1 > c) = (1 − c)² over the flat triangle
    assert int(out[2].split()[0]) <= 3000


def test_the_tolerance_counts(call: Call) -> None:
    rough, fine = (call("average", "bures", "-N", 3, "von-neumann", "--tol", tol)[1] for tol in ("1e-2", "1e-10"))
    assert numbers(fine)[1] <= 1e-10 < numbers(rough)[1]


def test_the_budget_searches_where_no_rule_is_shipped(call: Call) -> None:
    asked = ("average", "induced", "-N", 3, "-K", 6, "sum(x**2)")
    with_search, without = call(*asked, "--budget", "5s"), call(*asked)
    spent = [int(done[1][2].split()[0]) for done in (with_search, without)]
    assert spent[0] != spent[1]


def test_several_functions_have_variances_and_covariances(call: Call) -> None:
    status, out, err = call("average", "hilbert-schmidt", "-N", 3, "purity", "power-sum-3", "--tol", "1e-9")
    mu = hilbert_schmidt(3)
    assert (status, err) == (0, [])
    assert out[0] == "purity"
    assert float(out[1].split()[1]) == pytest.approx(3 / 5)
    assert out[2].split()[:2] == ["exact", "3/5"]
    assert float(out[3].split()[1]) == pytest.approx(float(mu.power_sum_covariance(2, 2)), abs=1e-9)
    assert out[-3] == "covariance of purity and power-sum-3"
    assert float(out[-2].split()[0]) == pytest.approx(float(mu.power_sum_covariance(2, 3)), abs=1e-9)


def test_moments_and_distribution_function(call: Call) -> None:
    status, out, err = call("average", "flat", "-N", 2, "purity", "--moments", 3, "--cdf", "0.5,0.625,1", "--seed", 4)
    assert (status, err) == (0, [])
    third = float(out[4].removeprefix("  moment 3  ").split()[0])
    assert third == pytest.approx(float(flat(2).power_sum_cumulant((2, 2, 2))), abs=1e-6)
    shares = [float(re.sub(r".*\)", "", line).split()[0]) for line in out if "P(f" in line]
    # p_2 = ½ + 2 (λ − ½)², so P(p_2 ≤ 5/8) = ½
    assert shares[0] < 0.01
    assert shares[1] == pytest.approx(0.5, abs=0.01)
    assert shares[2] == 1
    other = call("average", "flat", "-N", 2, "purity", "--moments", 3, "--cdf", "0.5,0.625,1", "--seed", 5)[1]
    assert other != out


def test_several_functions_that_miss_the_tolerance_say_so(call: Call) -> None:
    status, out, err = call("average", "flat", "-N", 3, "rank-0.2", "--moments", 2, "--max-evaluations", 2000)
    assert (status, len(err)) == (1, 1)
    assert "was not met" in err[0]
    assert out[0] == "rank-0.2"


def test_a_function_of_components_is_not_taken_for_symmetric(call: Call) -> None:
    status, out, err = call("average", "flat", "-N", 3, "x1", "--space", "symmetric")
    assert (status, out, len(err)) == (2, [], 1)
    assert "does not mind the order; got" in err[0]
    assert "x1" in err[0]
