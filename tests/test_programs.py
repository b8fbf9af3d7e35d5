"""The C and Fortran forms: compilers take them with every warning on, and they integrate."""

from __future__ import annotations

import math
import re
import shutil
import subprocess
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from mpmath import mp, mpf
from test_table import BY_HAND, RULES, simpson

from simplexcub.measures import bures, flat, hilbert_schmidt, induced
from simplexcub.rule import Provenance, Rule
from simplexcub.table import load, render
from simplexcub.table.describe import facts
from simplexcub.table.program import header, name

GCC, GFORTRAN = shutil.which("gcc"), shutil.which("gfortran")
needs_gcc = pytest.mark.skipif(GCC is None, reason="gcc is not on this machine (Debian: apt-get install gcc)")
needs_gfortran = pytest.mark.skipif(
    GFORTRAN is None, reason="gfortran is not on this machine (Debian: apt-get install gfortran)"
)
STRICT = ("-Wall", "-Wextra", "-Werror", "-pedantic")
COMPILED = [load(bures(2), degree=7), load(hilbert_schmidt(3), degree=7), load(flat(6), degree=5)]
MAIN_C = """
#include <float.h>
#include <math.h>
#include <stdio.h>
{defines}
#include "{name}.h"
static rule_real f(const rule_real *x, void *power)
{{
    rule_real value = x[1];
    for (int i = 0; i < *(int *)power; ++i)
        value *= x[0];
    return value;
}}
int main(void)
{{
    int power = {power};
    long double error = fabsl((long double){name}_mean(f, &power) / {exact}L - 1);
    printf("%d %d %d %d\\n", error <= 8 * {epsilon}, {name}_n, {name}_size, {name}_degree);
    return 0;
}}
"""
MAIN_F = """
program main
   use, intrinsic :: iso_fortran_env, only: real64
   use {name}, only: mean, quad, nodes_quad, weights_quad, n, size_of_rule, degree
   implicit none
   real(quad), parameter :: exact = {exact}_quad
   logical :: fine, finer
   fine = abs(mean(f)/real(exact, real64) - 1) <= 8*epsilon(1.0_real64)
   finer = abs(sum(weights_quad*nodes_quad(2, :)*nodes_quad(1, :)**{power})/exact - 1) <= 8*epsilon(1.0_quad)
   print '(l1, 1x, l1, 3(1x, i0))', fine, finer, n, size_of_rule, degree
contains
   function f(x) result(value)
      real(real64), intent(in) :: x(:)
      real(real64) :: value
      value = x(2)*x(1)**{power}
   end function f
end program main
"""


def run(*command: str, where: Path) -> str:
    return subprocess.run(command, cwd=where, check=True, capture_output=True, text=True, timeout=120).stdout


def exact_mean(rule: Rule) -> str:
    """E[λ_1^(t−1) λ_2] with 45 digits: a polynomial of the rule's own degree."""
    moment = rule.measure.moment((rule.degree - 1, 1, *[0] * (rule.measure.N - 2)))
    with mp.workdps(50):
        return mp.nstr(mpf(moment.numerator) / moment.denominator, 45, min_fixed=-math.inf, max_fixed=math.inf)


@needs_gcc
@pytest.mark.parametrize("rule", COMPILED, ids=repr)
@pytest.mark.parametrize(("defines", "epsilon"), [("", "DBL_EPSILON"), ("#define RULE_LONG_DOUBLE", "LDBL_EPSILON")])
def test_c_compiles_without_warnings_and_integrates(rule: Rule, defines: str, epsilon: str, tmp_path: Path) -> None:
    called = name(rule)
    (tmp_path / f"{called}.h").write_text(render(rule, "c"), encoding="ascii")
    main = MAIN_C.format(name=called, defines=defines, power=rule.degree - 1, exact=exact_mean(rule), epsilon=epsilon)
    (tmp_path / "main.c").write_text(main, encoding="ascii")
    run("gcc", "-std=c99", *STRICT, "main.c", "-o", "main", "-lm", where=tmp_path)
    assert run("./main", where=tmp_path).split() == ["1", str(rule.measure.N), str(len(rule)), str(rule.degree)]


@needs_gcc
def test_c_serves_as_a_source_file_of_its_own_and_beside_another_rule(tmp_path: Path) -> None:
    for rule in COMPILED[:2]:
        (tmp_path / f"{name(rule)}.c").write_text(render(rule, "c"), encoding="ascii")
        run("gcc", "-std=c99", *STRICT, "-c", f"{name(rule)}.c", where=tmp_path)
    both = "".join(f'#include "{name(rule)}.c"\n' for rule in (*COMPILED[:2], COMPILED[0]))
    (tmp_path / "both.c").write_text(both + "int main(void) { return 0; }\n", encoding="ascii")
    run("gcc", "-std=c99", *STRICT, "both.c", where=tmp_path)


@needs_gfortran
@pytest.mark.parametrize("rule", COMPILED, ids=repr)
def test_fortran_compiles_without_warnings_and_integrates(rule: Rule, tmp_path: Path) -> None:
    called = name(rule)
    (tmp_path / f"{called}.f90").write_text(render(rule, "fortran"), encoding="ascii")
    main = MAIN_F.format(name=called, power=rule.degree - 1, exact=exact_mean(rule))
    (tmp_path / "main.f90").write_text(main, encoding="ascii")
    run("gfortran", "-std=f2008", *STRICT, f"{called}.f90", "main.f90", "-o", "main", where=tmp_path)
    words = run("./main", where=tmp_path).split()
    assert words == ["T", "T", str(rule.measure.N), str(len(rule)), str(rule.degree)]


def test_fortran_keeps_the_limits_of_the_standard() -> None:
    """Lines of at most 132 characters, statements of at most 256 lines (Fortran 2008, 3.3.2)."""
    rule = load(hilbert_schmidt(3), degree=20)
    lines = render(rule, "fortran").splitlines()
    assert max(map(len, lines)) <= 132
    longest = current = 0
    for line in lines:
        current = current + 1 if line.endswith("&") else 0
        longest = max(longest, current)
    assert 0 < longest < 256
    assert len(rule) > 64


@pytest.mark.parametrize("to", ["c", "fortran"])
def test_every_fact_is_in_the_header_comment(to: str) -> None:
    rule = load(hilbert_schmidt(3), degree=7)
    mark = {"c": " *", "fortran": "!"}[to]
    comment = [line for line in render(rule, to).splitlines() if line.startswith(mark)]
    joined = " ".join(" ".join(line.removeprefix(mark) for line in comment).split())
    for fact in facts(rule):
        spelled = fact.text.translate(str.maketrans({"λ": "x", "≤": "<=", "−": "-", "–": "-"}))
        spelled = re.sub("[²³⁴⁵⁶⁷⁸⁹]+", lambda m: "^" + m[0].translate(str.maketrans("²³⁴⁵⁶⁷⁸⁹", "23456789")), spelled)
        assert f"{fact.label} {' '.join(spelled.split())}" in joined


@pytest.mark.parametrize("to", ["c", "fortran"])
def test_what_others_wrote_cannot_end_the_comment(to: str) -> None:
    odd = Provenance("pack*/age", 0, "undated", "x */ int main(void){} /* ??/ \\\nλ Łódź\x07")
    text = render(replace(simpson(), provenance=odd), to)
    assert text.isascii()
    assert text.count("*/") == {"c": 2, "fortran": 0}[to]
    assert "\\" not in text
    assert "??" not in text
    code = [line for line in text.splitlines() if "int main" in line]
    assert all(line.startswith((" *", "!")) for line in code)


@pytest.mark.parametrize("key", RULES)
def test_digits_come_back_identical(key: str) -> None:
    """Read by patterns that know the form, not by the package."""
    rule = RULES[key]
    flattened = [*(x for node in rule.node_decimals for x in node), *rule.weight_decimals]
    wanted = [x if "." in x else f"{x}.0" for x in flattened]
    assert re.findall(r"RULE_REAL\((-?[\d.]+)\)", render(rule, "c")) == wanted
    assert re.findall(r"(-?\d[\d.]*)_quad", render(rule, "fortran")) == wanted


def test_names_tell_rules_apart_and_are_names() -> None:
    rules = [*COMPILED, load(hilbert_schmidt(3), degree=9), replace(RULES["induced"], provenance=BY_HAND)]
    names = [name(rule) for rule in rules]
    assert len(set(names)) == len(names)
    assert all(re.fullmatch(r"[a-z][a-z0-9_]{0,62}", called) for called in names)
    assert name(RULES["induced"]) == "induced_n3_k5_t1_m1"
    assert name(replace(RULES["induced"], measure=induced(3, 7))) == "induced_n3_k7_t1_m1"
    assert max(map(len, header(rules[0]))) <= 96


def test_the_arrays_of_numpy_and_c_are_the_same_numbers() -> None:
    rule = COMPILED[1]
    found = re.findall(r"RULE_REAL\((-?[\d.]+)\)", render(rule, "c"))
    nodes = np.array([float(x) for x in found[: 3 * len(rule)]]).reshape(-1, 3)
    assert np.array_equal(nodes, rule.nodes)
