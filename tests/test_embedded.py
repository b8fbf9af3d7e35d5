"""Embedded weights: as exact as they claim, of the highest degree there is, kept by every format, and of use."""

from __future__ import annotations

import json
import re
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from conftest import Call

import simplexcub as sc
from simplexcub.decimals import significant_digits
from simplexcub.embedded import Embedded
from simplexcub.errors import InputError, NothingFound, TableError
from simplexcub.measures import Measure, bures, dirichlet, flat, hilbert_schmidt
from simplexcub.rule import Rule
from simplexcub.table import FORMATS, encode, render
from simplexcub.table.overview import by_name
from simplexcub.table.reading import parse
from simplexcub.table.rounding import rounded
from simplexcub.verify.residuals import partitions

CASES: list[tuple[Measure, int, str | None]] = [
    (flat(2), 9, "full"),
    (dirichlet(["1/2", "1/2"]), 7, None),
    (hilbert_schmidt(3), 7, "full"),
    (hilbert_schmidt(3), 12, "cyclic"),
    (bures(4), 5, "full"),
    (flat(4), 6, None),
]


def pick(measure: Measure, degree: int, symmetry: str | None) -> Rule:
    try:
        return sc.load(measure, degree=degree, symmetry=symmetry)
    except NothingFound:
        return sc.solve(measure, degree)


@pytest.fixture(params=CASES, ids=str)
def rule(request: pytest.FixtureRequest) -> Rule:
    return sc.embed(pick(*request.param))


def second(rule: Rule) -> Rule:
    """The embedded rule as a rule of its own."""
    assert rule.embedded is not None
    return replace(
        rule, degree=rule.embedded.degree, weight_decimals=rule.embedded.weight_decimals, orbits=(), embedded=None
    )


def test_the_second_weights_are_exact_to_their_degree(rule: Rule) -> None:
    report = sc.verify(second(rule))
    assert report.holds, report.reasons
    assert second(rule).weight_decimals != rule.weight_decimals
    assert second(rule).weights.min() == 0  # a vertex
    assert sc.verify(rule).holds


def test_no_higher_degree_leaves_a_choice() -> None:
    """Monomial symmetric functions at the orbits: their rank at the degree above is the number of orbits."""
    rule = sc.embed(sc.load(hilbert_schmidt(3), degree=13, symmetry="full"))
    assert rule.embedded is not None
    ranks = {}
    for degree in (rule.embedded.degree, rule.embedded.degree + 1):
        rows = []
        for nu in partitions(degree, 3, degree):
            permuted = {
                tuple(nu[i] for i in p) for p in ((0, 1, 2), (0, 2, 1), (1, 0, 2), (1, 2, 0), (2, 0, 1), (2, 1, 0))
            }
            whole = sum(np.prod(rule.nodes ** np.array(a), axis=1) for a in permuted)
            rows.append(whole / max(abs(whole)))
        ranks[degree] = np.linalg.matrix_rank(np.array(rows), tol=1e-7)
    assert ranks[rule.embedded.degree] < len(rule.orbits) == ranks[rule.embedded.degree + 1]


def test_simpson_holds_the_midpoint_rule() -> None:
    """Nodes 0, 1/2, 1: the other weights of degree 1 at a vertex are the trapezium's and the midpoint's."""
    simpson = replace(
        sc.solve(flat(2), 3, digits=20),
        node_decimals=(("0.5", "0.5"), ("0", "1"), ("1", "0")),
        weight_decimals=("0.66666666666666666667", "0.16666666666666666667", "0.16666666666666666667"),
        orbits=(),
    )
    assert sc.embed(simpson).embedded in (
        Embedded(1, ("0", "0.50000000000000000000", "0.50000000000000000000")),
        Embedded(1, ("1.0000000000000000000", "0", "0")),
    )


@pytest.mark.parametrize("to", ["json", "csv", "text"])
@pytest.mark.parametrize("by_orbits", [True, False])
def test_formats_that_are_read_back_keep_every_digit(to: str, by_orbits: bool) -> None:
    rule = sc.embed(sc.load(hilbert_schmidt(3), degree=7, symmetry="full"))
    rule = rule if by_orbits else replace(rule, orbits=())
    assert parse(render(rule, to), "table") == rule


@pytest.mark.parametrize("to", ["markdown", "latex", "python"])
def test_formats_for_people_show_the_second_column(to: str) -> None:
    rule = sc.embed(sc.load(flat(2), degree=9))
    assert rule.embedded is not None
    text = render(rule, to).replace(r"\,", "").replace(" ", "")
    assert all(w in text for w in rule.embedded.weight_decimals)
    assert "secondsetofweights" in text or "weightintheembeddedrule" in text


def places(text: str) -> list[str]:
    """The significant digits of every decimal in a text, its blocks joined."""
    joined = re.sub(r"(?<=\d)(?:\\,|[ \n]+)(?=\d{5})", "", text)
    return [found.lstrip("0") for found in re.findall(r"\b0\.(\d+)", joined)]


@pytest.mark.parametrize("to", [to for to, form in FORMATS.items() if to != "npz"])
def test_rounding_reaches_the_second_weights_in_every_format(to: str) -> None:
    rule = by_name("flat/N3/all-full-embedded-t04-6")
    assert max(map(len, places(render(rule, to)))) > 10
    short = rounded(rule, 10)
    assert max(map(len, places(render(short, to)))) == 10
    assert sc.verify(short).holds


def test_rounded_second_weights_are_those_of_the_table_to_so_many_digits(tmp_path: Path) -> None:
    rule = by_name("flat/N3/all-full-embedded-t04-6")
    assert rule.embedded is not None
    expected = [Fraction(w) for w in rule.embedded.weight_decimals]
    path = tmp_path / "short.npz"
    path.write_bytes(encode(rounded(rule, 12), "npz"))
    texts = np.load(path)["embedded_weight_decimals"]
    assert max(significant_digits(text) for text in texts) == 12
    assert all(abs(Fraction(str(t)) - w) <= Fraction(1, 2 * 10**12) for t, w in zip(texts, expected, strict=True))


def test_second_weights_are_checked_again_when_rounded() -> None:
    rule = by_name("flat/N3/all-full-embedded-t04-6")
    assert rule.embedded is not None
    wrong = replace(rule, embedded=replace(rule.embedded, degree=3))  # they are exact to degree 1
    with pytest.raises(InputError, match="embedded weights must hold when rounded to 9 digits; got the embedded"):
        rounded(wrong, 9)


def test_programs_can_use_the_second_column(tmp_path: Path) -> None:
    rule = sc.embed(sc.load(flat(2), degree=9))
    names: dict[str, Any] = {}
    exec(render(rule, "python"), names)
    np.testing.assert_array_equal(names["embedded_weights"], rule.embedded_weights)
    path = tmp_path / "rule.npz"
    path.write_bytes(encode(rule, "npz"))
    archive = np.load(path)
    np.testing.assert_array_equal(archive["embedded_weights"], rule.embedded_weights)
    assert rule.embedded is not None
    assert tuple(archive["embedded_weight_decimals"]) == rule.embedded.weight_decimals
    assert archive["embedded_degree"] == rule.embedded.degree


def test_the_checksum_covers_the_second_column() -> None:
    text = render(sc.embed(sc.load(flat(2), degree=9)), "json")
    record = json.loads(text)
    digits = record["embedded"]["weights"][1]
    with pytest.raises(TableError, match="sha256"):
        parse(text.replace('"weights": ["0.5', '"weights": ["0.6', 1).replace(digits, "0.1", 1), "table")


def test_verify_refuses_second_weights_that_are_wrong() -> None:
    rule = sc.embed(sc.load(flat(2), degree=9))
    assert rule.embedded is not None
    too_much = replace(rule, embedded=replace(rule.embedded, degree=5))
    assert "embedded weights claim degree 5" in sc.verify(too_much).reasons[0]
    same = replace(rule, embedded=Embedded(3, rule.weight_decimals))
    assert sc.verify(same).reasons == ("the embedded weights are the weights themselves",)
    short = replace(rule, embedded=Embedded(3, ("0.2", "0.2", "0.2", "0.2", "0.1")))
    assert "embedded: the weights sum to 1 - 1.0e-1" in sc.verify(short).reasons[0]


def test_an_estimate_takes_one_set_of_evaluations() -> None:
    rule = sc.embed(sc.load(hilbert_schmidt(3), degree=8))
    calls = []

    def purity(x: Any) -> Any:
        calls.append(x.shape)
        return np.stack([(x**2).sum(axis=1), (x**8).sum(axis=1)], axis=1)

    value, error = rule.estimate(purity)
    assert calls == [(len(rule), 3)]
    np.testing.assert_allclose(value, [3 / 5, float(hilbert_schmidt(3).power_sum_moment((8,)))], rtol=1e-13)
    assert error[0] < 1e-14  # both are exact there
    np.testing.assert_allclose(error[1], abs(value[1] - rule.embedded_weights @ (rule.nodes**8).sum(axis=1)))
    assert error[1] > 1e-6


def test_what_cannot_be_embedded_says_so() -> None:
    with pytest.raises(NothingFound, match="one orbit only"):
        sc.embed(sc.solve(flat(3), 1))
    with pytest.raises(InputError, match="must have embedded weights"):
        sc.load(flat(2), degree=3).estimate(lambda x: x[:, 0])
    with pytest.raises(InputError, match="must be exact for"):
        sc.embed(replace(sc.load(flat(2), degree=3), degree=0))


def test_the_command_prints_and_saves_both_columns(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "pair.json"
    status, out, _ = call("solve", "flat", "-N", 2, "-t", 5, "--embedded")
    assert status == 0
    assert any(line.split()[:5] == ["embedded", "weights", "w2", "on", "the"] for line in out)
    assert call("solve", "flat", "-N", 2, "-t", 5, "--embedded", "-o", path)[0] == 0
    rule = sc.read(path)
    assert rule.embedded is not None
    assert Fraction(rule.embedded.weight_decimals[0]) == 1
    status, out, _ = call("verify", path)
    assert status == 0
    assert any(line.startswith("embedded  second weights to degree 1") for line in out)
