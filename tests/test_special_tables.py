"""Shipped tables of equal weights, with entropies and with embedded weights: kept apart from the plain ones."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from conftest import Call

import simplexcub as sc
from simplexcub.errors import NothingFound
from simplexcub.measures import Measure, bures, flat, hilbert_schmidt, induced
from simplexcub.table import build_special, catalogue
from simplexcub.table.build_special import Target, build, targets
from simplexcub.table.kind import Kind, is_plain, kind_of
from simplexcub.table.shipped import add, folder, reindex
from simplexcub.verify import verify

SPECIAL = [item for item in catalogue() if item.kind.told]


def verified(rule: Any) -> Any:
    return rule.verified(verify(rule).verification)


@pytest.mark.parametrize("measure", [flat(2), hilbert_schmidt(3), bures(4), flat(4)], ids=str)
def test_who_asks_for_nothing_special_gets_nothing_special(measure: Measure) -> None:
    for degree in range(1, 9):
        rule = sc.load(measure, degree=degree)
        assert (rule.also, rule.embedded, rule.integer_weights) == ((), None, ())
        assert kind_of(rule) == Kind("all", rule.symmetry)


def test_every_kind_is_shipped_and_loaded_when_asked_for() -> None:
    assert {item.kind.told for item in SPECIAL} == {", equal weights", ", also entropy", ", embedded"}
    for measure in (flat(3), hilbert_schmidt(3), bures(3)):
        rule = sc.load(measure, degree=4, also="entropy")
        assert rule.also == ("entropy",)
        entropies = -(rule.nodes * np.log(rule.nodes)).sum(axis=1)
        np.testing.assert_allclose(rule.weights @ entropies, float(measure.entropy().value(20)), rtol=1e-14)
        rule = sc.load(measure, degree=4, embedded=True)
        assert rule.estimate(lambda x: x[:, 0]).error < 1e-15
        equal = sc.load(measure, degree=4, equal_weights=True)
        assert len(set(equal.weight_decimals)) == 1
        assert equal.equal_weights


def test_equal_weights_of_two_components_are_those_that_exist() -> None:
    """Bernstein 1937 for the flat measure; common practice, no source, for the Hilbert–Schmidt one."""
    for measure, counts in ((flat(2), [1, 2, 4, 6, 9]), (hilbert_schmidt(2), [1, 2, 4, 6])):
        degrees = range(1, 2 * len(counts), 2)
        assert [len(sc.load(measure, degree=t, equal_weights=True)) for t in degrees] == counts


def test_special_tables_are_proven_but_for_nodes_fixed_at_the_ends() -> None:
    unproven = [item.file for item in SPECIAL if not item.proven]
    assert unproven == ["bures/N2/all-full-equal-t05-4.json"]
    ends = sc.read(folder() / unproven[0])
    assert {(0.0, 1.0), (1.0, 0.0)} <= set(map(tuple, ends.nodes.tolist()))


def test_what_is_not_shipped_names_the_command() -> None:
    with pytest.raises(NothingFound, match=r"simplexcub solve flat -N 3 -t 40 --also entropy,power-1/2$"):
        sc.load(flat(3), degree=40, also=["entropy", "power-0.5"])
    with pytest.raises(NothingFound, match=r"equal weights found.*-t 3 --equal-weights$"):
        sc.load(induced(3, 7), degree=3, equal_weights=True)
    with pytest.raises(NothingFound, match=r"-t 3 --embedded$"):
        sc.load(induced(3, 7), degree=3, embedded=True)


def test_file_names_tell_kinds_apart() -> None:
    kinds = [
        Kind("all", "full"),
        Kind("all", "full", equal_weights=True),
        Kind("all", "full", integer_weights=True),
        Kind("all", "full", also=("entropy",)),
        Kind("all", "full", also=("entropy", "power-1/2")),
        Kind("all", "full", embedded=True),
        Kind("symmetric", "product-2-1"),
    ]
    stems = [kind.stem(7) for kind in kinds]
    assert len(set(stems)) == len(kinds)
    assert [is_plain(f"{stem}-12") for stem in stems] == [True, *[False] * 5, True]
    for item in catalogue():
        assert Path(item.file).name == f"{item.kind.stem(item.degree)}-{item.nodes}.json"


def test_adding_and_indexing_keep_kinds_apart(tmp_path: Path) -> None:
    plain = sc.load(flat(2), degree=5)
    pair = sc.embed(plain)
    integers = replace(plain, integer_weights=(1,) * len(plain), orbits=())
    for rule in (plain, pair, integers):
        assert add(verified(rule), tmp_path) is not None
    assert add(verified(pair), tmp_path) is None
    lines = reindex(tmp_path)
    assert sorted((line.embedded, line.integer_weights) for line in lines if line.embedded) == [(1, False)]
    record = json.loads((tmp_path / "index.json").read_text())["tables"]
    assert sum("embedded" in line for line in record) == 1
    assert sum("integer_weights" in line for line in record) == 1
    assert not any("also" in line for line in record)


def test_the_command_that_makes_them(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(build_special, "DEGREES", {"equal": {2: (3, 9)}, "entropic": {2: (3,)}, "embedded": {2: (5,)}})
    said: list[str] = []
    written = build(targets((), ["flat"]), where=tmp_path, budget=2, say=said.append)
    assert {path.name for path in written} == {
        "all-full-equal-t03-2.json",
        "all-full-equal-t09-9.json",
        "all-full-also-entropy-t03-3.json",
        "all-full-embedded-t05-3.json",
    }
    assert build(targets(["equal"], ["flat"]), where=tmp_path, budget=2, only_missing=True, say=said.append) == []
    assert len(said) == 4
    assert [t.measure.family for t in targets(["embedded"], ["bures"], [2])] == ["bures"]
    assert build_special.main(["--kind", "equal", "-N", "2", "--folder", str(tmp_path), "--measure", "flat"]) == 0
    assert list(targets((), (), [3])) == []
    assert Target("equal", flat(2), 3).exists(tmp_path)
    assert not Target("equal", flat(2), 5).exists(tmp_path)


@pytest.mark.parametrize(
    ("options", "told"),
    [
        (("--equal-weights",), "equal weights"),
        (("--also", "entropy"), "also entropy"),
        (("--embedded",), "embedded to degree"),
    ],
)
def test_the_list_can_be_narrowed(call: Call, options: tuple[str, ...], told: str) -> None:
    status, out, _ = call("tables", "flat", "-N", 3, *options)
    assert status == 0
    assert out[0].split()[-2:] == ["special", "name"]
    assert len(out) > 3
    assert all(told in line for line in out[1:])
    _, everything, _ = call("tables", "flat", "-N", 3)
    assert len(everything) > len(out)
