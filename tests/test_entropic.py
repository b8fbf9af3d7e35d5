"""Rules that average entropies and real powers exactly besides polynomials; their means; what is refused."""

from __future__ import annotations

import math
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from conftest import Call
from mpmath import mp, mpf

import simplexcub as sc
from simplexcub.entropic import canonical, named
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Measure, bures, bures_hall, dirichlet, flat, hilbert_schmidt, induced
from simplexcub.rule import Rule
from simplexcub.search.counts import possible_counts
from simplexcub.search.extended import extended_basis
from simplexcub.search.extra import Extra, read_extras
from simplexcub.symmetry import named_group
from simplexcub.table import render
from simplexcub.table.reading import parse
from simplexcub.verify.entropic import mean_of
from simplexcub.verify.mend import mend
from simplexcub.verify.printed import read_printed
from simplexcub.verify.proof import _system
from simplexcub.verify.proof_entropic import ExtendedSystem
from simplexcub.verify.proof_orbits import find_structure

DIGITS = 30


def page(n: int, k: int) -> Fraction:
    """Mean entropy of the induced measure (Page 1993; proved by Foong & Kanno 1994)."""
    return sum((Fraction(1, j) for j in range(k + 1, n * k + 1)), Fraction(0)) - Fraction(n - 1, 2 * k)


@pytest.fixture(scope="module")
def entropic() -> Rule:
    return sc.solve(hilbert_schmidt(3), 4, also="entropy", digits=DIGITS, budget=2)


def exact_mean(rule: Rule, f: Any) -> mpf:
    return mp.fsum(w * f(node) for node, w in zip(rule.exact_nodes(50), rule.exact_weights(50), strict=True))


def entropy(node: list[mpf]) -> mpf:
    return -mp.fsum(x * mp.log(x) for x in node)


def test_page_is_integrated_exactly(entropic: Rule) -> None:
    with mp.workdps(50):
        mean = page(3, 3)
        assert abs(exact_mean(entropic, entropy) - mpf(mean.numerator) / mean.denominator) < mpf(10) ** (3 - DIGITS)
    plain = sc.load(hilbert_schmidt(3), degree=4)
    entropies = -(plain.nodes * np.log(plain.nodes)).sum(axis=1)
    assert abs(plain.weights @ entropies - float(page(3, 3))) > 1e-3  # a plain rule does not


def test_the_bures_entropy_is_integrated_exactly() -> None:
    """ψ(N²/2 + 1) − ψ(N + 1/2) (Sarkar & Kumar 2019; proved by Wei 2020)."""
    rule = sc.solve(bures(2), 3, also=["entropy"], digits=DIGITS, budget=2)
    with mp.workdps(50):
        mean = mp.digamma(3) - mp.digamma(mpf(5) / 2)
        assert abs(exact_mean(rule, entropy) - mean) < mpf(10) ** (3 - DIGITS)


@pytest.mark.parametrize(
    ("measure", "degree", "also", "options"),
    [
        (flat(2), 5, ["entropy", "power-0.3"], {}),
        (flat(3), 3, ["entropy", "entropy-2"], {}),
        (bures(3), 3, ["power-1/2"], {}),
        (induced(2, 4), 3, ["entropy", "power--1"], {}),
        (dirichlet([1, 1, 2]), 2, ["entropy"], {}),
        (hilbert_schmidt(3), 3, ["entropy"], {"symmetry": "cyclic"}),
        (hilbert_schmidt(3), 3, ["entropy"], {"include": "vertices"}),
    ],
)
def test_rules_are_verified_and_proven(measure: Measure, degree: int, also: list[str], options: Any) -> None:
    rule = sc.solve(measure, degree, also=also, digits=DIGITS, budget=2, **options)
    assert rule.also == tuple(canonical(name) for name in also)
    report = sc.verify(rule, prove=True)
    assert report.holds, report.reasons
    assert [check.name for check in report.also] == list(rule.also)
    assert all(0 <= check.ratio <= 1 for check in report.also)
    assert report.proof is not None
    assert report.proof.holds, report.proof.reason
    assert report.proof.method.startswith("Newton")
    plain = sc.verify(replace(rule, also=()), prove=True).proof
    assert plain is not None
    assert report.proof.equations == plain.equations + len(also)


@pytest.mark.parametrize(
    "measure",
    [
        *(flat(3), dirichlet(["1/2", 1, "3/2"]), hilbert_schmidt(3), induced(2, 5), hilbert_schmidt(7)),
        *(bures(3), bures_hall(3, 4)),
    ],
    ids=str,
)
@pytest.mark.parametrize("name", ["entropy", "entropy-3", "power-1/2", "power--0.3"])
def test_means_by_a_second_formula(measure: Measure, name: str) -> None:
    label = named(name)
    assert label.power is not None
    q = label.power
    with mp.workdps(130):
        first = measure.log_mean(int(q)).value(120) if label.logarithm else measure.power_mean(q, dps=120)
        assert abs(mean_of(label, measure, 120) - first) < mpf(10) ** -117 * (1 + abs(first))


def test_a_plain_rule_that_claims_the_entropy_is_caught() -> None:
    rule = replace(sc.load(hilbert_schmidt(3), degree=8), also=("entropy",))
    report = sc.verify(rule, prove=True)
    assert not report.holds
    assert "the mean of Σ λ ln λ is claimed, but is off by" in report.reasons[0]
    assert report.proof is not None
    assert not report.proof.holds
    assert "NOT VERIFIED: the mean of Σ λ ln λ" in render(rule)


@pytest.mark.parametrize("to", ["json", "csv", "text"])
def test_formats_keep_the_names(entropic: Rule, to: str) -> None:
    assert parse(render(entropic, to), "table") == entropic


def test_the_heading_says_what_the_rule_is_exact_for(entropic: Rule) -> None:
    wanted = "every polynomial of degree ≤ 4, and Σ λ ln λ"
    for to in ("text", "markdown", "python"):
        assert wanted in " ".join(render(entropic, to).split())
    assert r"and $\Sigma$ $\lambda$ ln $\lambda$" in " ".join(render(entropic, "latex").split())


def test_a_function_of_the_user() -> None:
    """E[λ1 λ2 λ3] over the triangle is 1/60; exp gives 3 · 2 ∫ e^x (1 − x) dx = 6 (e − 2)."""
    with mp.workdps(50):
        mean = mpf(1) / 60 + 6 * (mp.e - 2)
        mine = sc.KnownMean("det plus exp", lambda x: x[0] * x[1] * x[2] + mp.fsum(map(mp.exp, x)), mp.nstr(mean, 50))
    rule = sc.solve(flat(3), 2, also=[mine, "entropy"], digits=DIGITS, budget=2)
    assert rule.also == ("user:det plus exp", "entropy")
    with mp.workdps(50):
        assert abs(exact_mean(rule, mine.value) - mean) < mpf(10) ** (3 - DIGITS)
    text = render(rule)
    assert "verified, but for user:det plus exp, of which a table has only the name" in text
    assert parse(text, "table") == rule
    proof = sc.verify(rule, prove=True).proof
    assert proof is not None
    assert "only the name is known" in proof.reason


@pytest.mark.parametrize(
    ("measure", "also", "message"),
    [
        (flat(3), ["power--1"], r"must have a finite, known mean: q must be above -1, where the mean .* diverges"),
        (flat(3), ["power-2"], "must not be a combination of the polynomials"),
        (flat(3), ["power-1/2", "power-0.5"], "every function in also must be named once; got power-1/2"),
        (flat(3), ["power-0.3", "power-0.30000001"], "must not be a combination"),
        (flat(3), ["renyi"], "also must name entropy, entropy-K"),
        (flat(3), ["entropy-0"], "also must name entropy, entropy-K"),
        (flat(3), ["user:mine"], "also must list names, or functions as KnownMean"),
        (sc.orthogonal(3, 3), ["entropy"], "must have a finite, known mean"),
        (
            flat(3),
            [sc.KnownMean("lopsided", lambda x: x[0], "a third")],
            "the mean of lopsided must be a finite number",
        ),
        (flat(3), [sc.KnownMean("lopsided", lambda x: x[0], "0.3")], "lopsided must be symmetric in its components"),
    ],
)
def test_bad_functions_are_refused(measure: Measure, also: list[Any], message: str) -> None:
    with pytest.raises(InputError, match=message) as caught:
        sc.solve(measure, 3, also=also, budget=1)
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"equal_weights": True}, "weights must be free where more than polynomials"),
        ({"integer_weights": 3}, "weights must be free where more than polynomials"),
    ],
)
def test_options_that_do_not_go_together(options: Any, message: str) -> None:
    with pytest.raises(InputError, match=message):
        sc.solve(flat(3), 3, also="entropy", **options)


def test_infinite_values_at_chosen_nodes_are_refused() -> None:
    with pytest.raises(InputError, match="must be finite at the chosen nodes"):
        sc.solve(induced(2, 4), 3, also="power--1", include="vertices")
    with pytest.raises(NothingFound, match="exact for more than polynomials"):
        sc.solve(flat(4), 6, also="entropy", budget=1e-9)


def test_slopes_are_those_of_the_values() -> None:
    """The derivatives of every kind of function, by differences."""
    mine = sc.KnownMean("cubes", lambda x: mp.fsum(v**3 for v in x), "0.3")
    for extra in (
        *read_extras(["entropy-2", "power--1/3"], induced(3, 6), named_group("full", 3)),
        Extra(named("user:a"), mine),
    ):
        values = np.array([[0.2, 0.6], [0.35, 0.3]])
        h = 1e-6
        step = np.array([h, -2 * h])
        moved, back = values + step, values - step
        slope = (extra.jet(moved, (2, 1))[:, 0] - extra.jet(back, (2, 1))[:, 0]) / (2 * h)
        # d/dv of the first value moves both of its components, the last follows from the sum: 2 v + u = 1.
        np.testing.assert_allclose(extra.jet(values, (2, 1))[:, 1], slope, rtol=1e-6)


def test_the_functions_take_their_share_of_unknowns() -> None:
    group = named_group("full", 3)
    also = read_extras(["entropy", "power-1/2"], flat(3), group)
    assert len(extended_basis(group, 4, also, flat(3))) == len(extended_basis(group, 4, (), flat(3))) + 2
    fewest = [
        next(m for m in range(1, 60) if possible_counts(group, 4, m, also=extras)) for extras in ((), also[:1], also)
    ]
    assert fewest == sorted(fewest)
    assert fewest[0] < fewest[2]


def test_bounds_of_the_proof_hold_at_random_points(entropic: Rule) -> None:
    """|∇F(y) − ∇F(x)| ≤ curvature · |y − x| for points of the box, gradients by interval arithmetic."""
    printed = read_printed(entropic)
    structure = find_structure(printed, entropic.measure, "all")
    inner = _system(structure, entropic.measure, 4, "all", None, len(entropic))
    system = ExtendedSystem(inner, [named("entropy"), named("power-1/2")], entropic.measure)
    bits, radius = 120, 1e-3
    one = system.factor << bits
    centre = [
        Fraction(orbit.weight if b < 0 else orbit.values[b], printed.one)
        for o, b in system.unknowns
        for orbit in [structure.orbits[o]]
    ]
    rng = np.random.default_rng(5)
    x = [round(v * 2**bits) * system.factor for v in centre]
    here = np.array(system.jacobian(x, one, bits), dtype=float) / 2.0**bits
    bound = system.curvature(x, one, radius)
    for _ in range(20):
        moves = rng.uniform(-radius, radius, len(x))
        y = [v + round(float(d) * 2**bits) * system.factor for v, d in zip(x, moves, strict=True)]
        there = np.array(system.jacobian(y, one, bits), dtype=float) / 2.0**bits
        assert (np.abs(there - here).sum(axis=0) <= bound * np.abs(moves).max()).all()
        numeric = (
            np.array(system.scaled(y, one, bits), float) - np.array(system.scaled(x, one, bits), float)
        ) / 2.0**bits
        np.testing.assert_allclose(numeric, moves @ (here + there) / 2, atol=float(bound.max()) * radius**2)


def test_the_options_of_the_command(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "rule.json"
    arguments = ("solve", "flat", "-N", 2, "-t", 3, "--also", "entropy,power-0.5", "--digits", 20, "--budget", "2s")
    assert call(*arguments, "-o", path)[0] == 0
    assert sc.read(path).also == ("entropy", "power-1/2")
    status, out, _ = call("verify", path)
    assert status == 0
    assert any(line.startswith("also      entropy off by ") and "power-1/2 off by" in line for line in out)
    assert any("proven: an exact rule lies within" in line for line in out)
    status, _, err = call("solve", "flat", "-N", 3, "-t", 3, "--also", "power--1")
    assert (status, len(err)) == (2, 1)
    assert "diverges" in err[0]


def test_names_have_one_spelling() -> None:
    assert [canonical(name) for name in ("entropy-1", "power-0.50", "power-2/4", "entropy-007")] == [
        *("entropy", "power-1/2", "power-1/2", "entropy-7")
    ]
    assert math.isclose(float(named("power--1/3").power or 0), -1 / 3)


def test_local_functions_are_not_sent_to_other_processes() -> None:
    mine = sc.KnownMean("cubes", lambda x: mp.fsum(v**3 for v in x), "0.3")
    with pytest.raises(InputError, match="cubes must be a function that other processes can load"):
        sc.solve(flat(3), 2, also=mine, jobs=2)


def test_mending_keeps_the_functions(entropic: Rule) -> None:
    short = replace(
        entropic,
        node_decimals=tuple(tuple(x[:14] for x in node) for node in entropic.node_decimals),
        weight_decimals=tuple(w[:14] for w in entropic.weight_decimals),
        orbits=(),
        digits=12,
    )
    mended = mend(short)
    assert mended.also == ("entropy",)
    with mp.workdps(50):
        mean = page(3, 3)
        assert abs(exact_mean(mended, entropy) - mpf(mean.numerator) / mean.denominator) < mpf(10) ** -48
