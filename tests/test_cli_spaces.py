"""`simplexcub solve --space`, and what becomes of such rules in files, lists and formats."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from conftest import Call

from simplexcub.measures import flat, hilbert_schmidt
from simplexcub.search import solve
from simplexcub.table import load, read, render
from simplexcub.table.build import main as build
from simplexcub.table.shipped import catalogue


def test_symmetric_rules_are_printed_as_representatives(call: Call) -> None:
    status, out, err = call("solve", "hilbert-schmidt", "-N", 16, "-t", 6, "--space", "symmetric", "--digits", 12)
    assert (status, err) == (0, [])
    text = "\n".join(out)
    assert out[0].endswith("Hilbert–Schmidt eigenvalue measure, N = 16, symmetric degree 6, 3 representatives")
    assert "every symmetric polynomial of degree ≤ 6" in text
    assert "nodes         3 representatives, one ordered spectrum for each orbit" in text
    assert "no rule of this degree has fewer than 3 representatives" in text
    assert "an exact rule lies within" in text


def test_ordered_rules_are_saved_and_verified(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "o.json"
    status, out, err = call("solve", "hilbert-schmidt", "-N", 3, "-t", 3, "--space", "ordered", "-o", path)
    assert (status, err) == (0, [])
    assert out[0].startswith("hilbert-schmidt(N=3, K=3), ordered, degree 3:")
    record = json.loads(path.read_text(encoding="utf-8"))
    assert record["space"] == "ordered"
    assert record["measure"] == {"family": "hilbert-schmidt", "N": 3, "K": 3}
    assert record["verification"]["proof"]["holds"] is True
    status, out, err = call("verify", path)
    assert (status, err) == (0, [])
    assert "claim     degree 3, space ordered, 50 digits" in out
    assert any(line.startswith("proof     proven") for line in out)


def test_a_measure_of_its_own_is_told_from_ordered_nodes(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "o.json"
    assert call("solve", "flat", "-N", 2, "-t", 3, "--space", "ordered", "-o", path)[0] == 0
    status, out, _ = call("verify", path, "--measure", "any")
    assert status == 0
    assert out[0].split()[:2] == ["matches", "flat(N=2)"]


def test_ordered_bures_is_refused_with_the_reason(call: Call) -> None:
    status, out, err = call("solve", "bures", "-N", 3, "-t", 4, "--space", "ordered")
    assert (status, out, len(err)) == (2, [], 1)
    assert "bures(N=3)" in err[0]
    assert "no exact moments" in err[0]
    assert "Space symmetric" in err[0]


@pytest.mark.parametrize("space", ["symmetric", "ordered"])
@pytest.mark.parametrize("form", ["json", "csv", "text"])
def test_every_digit_comes_back(space: str, form: str, tmp_path: Path) -> None:
    rule = solve(hilbert_schmidt(2), 5, space="symmetric" if space == "symmetric" else "ordered", digits=20)
    path = tmp_path / "rule"
    path.write_text(str(render(rule, form)), encoding="utf-8")
    again = read(path)
    assert (again.space, again.degree, again.measure) == (space, rule.degree, rule.measure)
    assert (again.node_decimals, again.weight_decimals) == (rule.node_decimals, rule.weight_decimals)


@pytest.mark.parametrize(
    ("space", "words"), [("symmetric", "every symmetric polynomial of degree"), ("ordered", "in the ordered spectrum")]
)
def test_other_forms_say_what_the_rule_is_exact_for(space: str, words: str) -> None:
    rule = solve(flat(2), 3, space="symmetric" if space == "symmetric" else "ordered", digits=12)
    for form in ("markdown", "latex", "python"):
        text = str(render(rule, form))
        assert words in text
        assert f"{space} degree" in text


def test_the_build_makes_tables_of_a_space(tmp_path: Path) -> None:
    wanted = ["--measure", "flat", "-N", "2", "-t", "7", "--folder", str(tmp_path)]
    assert build([*wanted, "--space", "symmetric"]) == 0
    assert build([*wanted, "--space", "ordered"]) == 0
    names = sorted(path.name for path in (tmp_path / "flat" / "N2").iterdir())
    assert names == ["ordered-none-t07-4.json", "symmetric-full-t07-2.json"]
    before = {path.name: path.stat().st_mtime_ns for path in (tmp_path / "flat" / "N2").iterdir()}
    assert build([*wanted, "--space", "ordered", "--only-missing"]) == 0
    assert before == {path.name: path.stat().st_mtime_ns for path in (tmp_path / "flat" / "N2").iterdir()}


def test_shipped_spectra_reach_their_bounds(call: Call) -> None:
    large = [item for item in catalogue("hilbert-schmidt", space="symmetric") if item.N >= 8]
    assert {(item.N, item.degree, item.nodes, item.bound) for item in large} == {
        (n, t, m, m) for n in (8, 16, 32, 64) for t, m in ((6, 3), (8, 5), (10, 7))
    }
    status, out, _ = call("tables", "hilbert-schmidt", "-N", 16)
    assert status == 0
    assert out[1].split()[:7] == ["hilbert-schmidt", "16", "symmetric", "full", "6", "3", "3"]


def test_load_takes_the_space() -> None:
    rule = load(hilbert_schmidt(16), degree=5, space="symmetric")
    assert (rule.space, rule.degree, len(rule)) == ("symmetric", 6, 3)
    ordered = load(hilbert_schmidt(3), degree=3, space="ordered")
    assert ordered.average(lambda x: x[:, 0]) == pytest.approx(313 / 432, abs=1e-14)
