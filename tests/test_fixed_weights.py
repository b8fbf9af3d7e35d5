"""Equal and integer weights: the claim is true of every digit, and proven with weights fixed at the fractions."""

from __future__ import annotations

import json
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from conftest import Call

import simplexcub as sc
from simplexcub.errors import InputError, NothingFound, TableError
from simplexcub.measures import Measure, bures, flat, hilbert_schmidt
from simplexcub.rule import Rule
from simplexcub.search.counts import possible_counts
from simplexcub.symmetry import named_group
from simplexcub.table import render
from simplexcub.table.reading import parse


@pytest.mark.parametrize(
    ("measure", "degree", "most"),
    [
        (flat(2), 10, 13),
        (hilbert_schmidt(2), 8, 10),
        (flat(3), 2, 3),
        (flat(3), 5, 12),
        (hilbert_schmidt(3), 6, 18),
        (bures(3), 4, 12),
        (flat(4), 4, 18),
    ],
)
def test_equal_weights(measure: Measure, degree: int, most: int) -> None:
    rule = sc.solve(measure, degree, equal_weights=True, budget=3)
    assert rule.equal_weights
    assert len(rule) <= most
    assert {Fraction(w) for w in rule.weight_decimals} == {Fraction(rule.weight_decimals[0])}
    np.testing.assert_allclose(rule.weights, 1 / len(rule), rtol=1e-15)
    report = sc.verify(rule, prove=True)
    assert report.holds, report.reasons
    assert report.proof is not None
    assert report.proof.holds
    assert set(report.proof.weights) == {Fraction(1, len(rule))}
    assert not any("weight" in name for name in report.proof.fixed)


@pytest.fixture(scope="module")
def integers() -> Rule:
    """A rule for the degree that eight equal weights cannot reach."""
    return sc.solve(flat(2), 8, integer_weights=3, digits=40)


def test_integer_weights(integers: Rule) -> None:
    total = sum(integers.integer_weights)
    assert 1 < max(integers.integer_weights) <= 3
    assert not integers.equal_weights
    for weight, integer in zip(integers.weight_decimals, integers.integer_weights, strict=True):
        assert abs(Fraction(weight) - Fraction(integer, total)) < Fraction(1, 10**40)
    report = sc.verify(integers, prove=True)
    assert report.holds, report.reasons
    assert report.proof is not None
    assert report.proof.holds
    assert sorted(report.proof.weights) == sorted(Fraction(k, total) for k in integers.integer_weights)
    # Fewer nodes than the 9 that equal weights need (Bernstein 1937).
    assert len(integers) < 9


@pytest.mark.parametrize("symmetry", ["cyclic", "none"])
def test_fixed_weights_under_other_groups(symmetry: str) -> None:
    rule = sc.solve(flat(3), 3, symmetry=symmetry, equal_weights=True, budget=10)
    report = sc.verify(rule, prove=True)
    assert report.holds
    assert report.proof is not None
    assert report.proof.holds
    assert rule.equal_weights


def test_every_format_keeps_the_integers(integers: Rule) -> None:
    for to in ("json", "csv", "text"):
        assert parse(render(integers, to), "table") == integers
    shown = " ".join(map(str, integers.integer_weights))
    for to in ("markdown", "latex", "python", "text"):
        text = " ".join(render(integers, to).split())
        assert f"the weights times {sum(integers.integer_weights)}: {shown}" in text


def test_false_claims_of_integers_are_caught(integers: Rule) -> None:
    turned = replace(integers, integer_weights=integers.integer_weights[::-1])
    swapped = replace(turned, integer_weights=(*turned.integer_weights[1:], turned.integer_weights[0]))
    assert "is claimed to be" in sc.verify(swapped).reasons[0]
    line = f"# integer_weights: {json.dumps(integers.integer_weights)}"
    text = render(integers, "csv")
    assert line in text
    with pytest.raises(TableError, match="one positive integer per node"):
        parse(text.replace(line, line.replace("1", "0")), "table")
    with pytest.raises(InputError, match="integer weights must be at least 1; got 0"):
        replace(integers, integer_weights=(0,) * len(integers))
    with pytest.raises(InputError, match="one integer weight per node"):
        replace(integers, integer_weights=(1, 2))


def test_structures_count_coordinates_only() -> None:
    """Degree 5 on the triangle: e2, e3, e2², e2 e3 to be met, so four free coordinates are needed."""
    group = named_group("full", 3)
    for nodes in range(1, 20):
        for counts in possible_counts(group, 5, nodes, fixed_weights=True):
            assert sum(c * (t.unknowns - 1) for t, c in counts) >= 4
    assert possible_counts(group, 5, 12, fixed_weights=True)
    assert not possible_counts(group, 5, 9, fixed_weights=True)


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"equal_weights": True, "integer_weights": 2}, "weights must be equal or integers, not both"),
        ({"integer_weights": -1}, "integer_weights must be"),
        ({"integer_weights": 1001}, "integer_weights must be"),
        ({"equal_weights": True, "include": "vertices"}, "weights must be free where nodes are chosen"),
    ],
)
def test_options_that_do_not_go_together(options: dict[str, Any], message: str) -> None:
    with pytest.raises(InputError, match=message):
        sc.solve(flat(3), 3, **options)


def test_nothing_found_says_what_was_looked_for() -> None:
    with pytest.raises(NothingFound, match="no structure with equal weights was solved"):
        sc.solve(flat(4), 8, equal_weights=True, budget=1e-9)


def test_options_of_the_command(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "rule.json"
    assert call("solve", "flat", "-N", 3, "-t", 2, "--equal-weights", "-o", path)[0] == 0
    assert sc.read(path).equal_weights
    assert call("verify", path)[0] == 0
    assert call("solve", "flat", "-N", 2, "-t", 8, "--integer-weights", 3, "-o", path)[0] == 0
    assert sc.read(path).integer_weights
    assert call("verify", path)[0] == 0


def test_the_exact_decision_is_told_when_the_search_fails_as_well() -> None:
    with pytest.raises(NothingFound, match=r"11 nodes of equal weight and degree 11 do not exist.*in 1e-09 s"):
        sc.solve(flat(2), 10, equal_weights=True, budget=1e-9)
    found = sc.solve(flat(2), 10, equal_weights=True, budget=3)
    assert found.degree == 11
    assert found.provenance.method.startswith("orbit search with equal weights; 10 nodes of equal weight and degree 10")


@pytest.mark.parametrize("largest", [0, -4, 1001])
def test_integer_weights_have_a_range(largest: int) -> None:
    with pytest.raises(InputError, match=f"integer_weights must be an integer from 1 to 1000; got {largest}"):
        sc.solve(flat(3), 3, integer_weights=largest)
