"""The shipped tables: complete, true, found wherever the package is installed, and quick to load."""

import json
import time
import tomllib
from dataclasses import replace
from pathlib import Path

import pytest
from test_table import simpson, vertices_and_centre, with_negative_weight

import simplexcub
from simplexcub.errors import InputError, NothingFound, TableError
from simplexcub.measures import dirichlet, flat, from_parameters, hilbert_schmidt, induced
from simplexcub.table import build as table_build
from simplexcub.table import catalogue, load, read, save
from simplexcub.table import shipped as find
from simplexcub.table.shipped import Shipped, add, folder, reindex, solve_command
from simplexcub.verify import verify

SHIPPED = catalogue()
# Nodes of the cheapest known fully symmetric rules with positive weights and nodes inside; fewer would be better.
NODES = {
    flat(3): (1, 3, 6, 6, 7, 12, 15, 16, 19, 25, 28, 33, 37, 42),
    flat(4): (1, 4, 8, 14, 14, 24, 35, 46),
    hilbert_schmidt(3): (1, 3, 6, 6, 9, 12, 15, 18, 21, 27, 30, 36, 39, 45),
    hilbert_schmidt(4): (1, 4, 10, 16, 24, 31, 38, 60),
}


@pytest.mark.parametrize("measure", [flat(2), hilbert_schmidt(2)], ids=str)
def test_gauss_rules_are_shipped_to_degree_41(measure):
    assert [len(load(measure, degree=t)) for t in range(1, 42)] == [t // 2 + 1 for t in range(1, 42)]


@pytest.mark.parametrize("measure", NODES, ids=str)
def test_as_few_nodes_as_promised(measure):
    counts = [len(load(measure, degree=t)) for t in range(1, len(NODES[measure]) + 1)]
    assert all(count <= most for count, most in zip(counts, NODES[measure], strict=True)), counts


@pytest.mark.parametrize("line", SHIPPED, ids=lambda line: line.file.removesuffix(".json"))
def test_every_shipped_table_is_what_the_index_says_and_holds(line):
    rule = read(folder() / line.file)
    assert (rule.measure, rule.space, rule.symmetry, rule.degree, len(rule), rule.digits) == (
        *(from_parameters(line.measure), line.space, line.symmetry, line.degree, line.nodes),
        50,
    )
    report = verify(rule, max_degree=rule.degree)
    assert report.holds, report.reasons
    assert report.verification.positive
    assert report.verification.inside
    assert rule.verification.lower_bound == line.bound <= line.nodes


def test_the_index_lists_every_file_and_no_other():
    files = {path.relative_to(folder()).as_posix() for path in folder().rglob("*.json")} - {"index.json"}
    assert {line.file for line in SHIPPED} == files


def test_load_takes_the_cheapest_rule_that_is_exact_enough(tmp_path, monkeypatch):
    monkeypatch.setattr(find, "folder", lambda: tmp_path)
    kinds = [(3, 2, "full"), (5, 3, "full"), (7, 3, "none"), (7, 4, "full")]
    for degree, nodes, symmetry in kinds:
        texts = [f"0.{k}" for k in range(1, nodes + 1)]
        rule = replace(
            simpson(),
            degree=degree,
            node_decimals=tuple((x, f"{1 - float(x):.1f}") for x in texts),
            weight_decimals=("1", *["0"] * (nodes - 1)),
            symmetry=symmetry,
        )
        add(rule.verified(verify(simpson()).verification), tmp_path)
    reindex(tmp_path)

    def found(degree, **options):
        rule = load(flat(2), degree=degree, **options)
        return rule.degree, len(rule), rule.symmetry

    assert found(1) == found(3) == (3, 2, "full")
    assert found(4) == found(5) == (5, 3, "full")
    assert found(6) == (7, 3, "none")
    assert found(6, symmetry="full") == (7, 4, "full")
    assert found(1, symmetry="none") == (7, 3, "none")
    with pytest.raises(NothingFound, match="the shipped ones end at degree 7"):
        found(8)
    with pytest.raises(NothingFound, match="none is shipped"):
        found(3, space="symmetric")


def test_loading_takes_less_than_20_ms():
    times = []
    for _ in range(5):
        start = time.perf_counter()
        load(hilbert_schmidt(3), degree=14)
        times.append(time.perf_counter() - start)
    assert min(times) < 0.02


def test_the_top_level_load():
    assert simplexcub.load is load
    assert simplexcub.load(simplexcub.flat(2), degree=7).average(lambda x: x[:, 0] ** 7) == pytest.approx(
        1 / 8, rel=1e-14
    )


@pytest.mark.parametrize(
    ("measure", "options", "command"),
    [
        (flat(2), {"degree": 99}, "simplexcub solve flat -N 2 -t 99"),
        (induced(3, 7), {"degree": 5}, "simplexcub solve induced -N 3 -K 7 -t 5"),
        (dirichlet(["1/2", 2]), {"degree": 3}, "simplexcub solve dirichlet --alpha 1/2,2 -t 3"),
        (
            flat(3),
            {"degree": 55, "space": "ordered", "symmetry": "none"},
            "simplexcub solve flat -N 3 -t 55 --space ordered --symmetry none",
        ),
    ],
    ids=str,
)
def test_what_is_not_shipped_can_be_made(measure, options, command):
    with pytest.raises(NothingFound) as caught:
        load(measure, **options)
    assert str(caught.value).endswith(f"Make one: {command}")
    assert solve_command(measure, **options) == command


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: load("flat", degree=3), "measure must be a measure such as flat"),
        (lambda: load(flat(2), degree=0), "degree must be an integer of at least 1; got 0"),
        (lambda: load(flat(2), degree=3.0), "degree must be an integer of at least 1; got 3.0"),
        (lambda: load(flat(2), degree=True), "degree must be an integer"),
        (lambda: load(flat(2), degree=3, space="half"), "space must be one of all, symmetric, ordered; got half"),
        (lambda: catalogue("round"), "measure must be one of flat"),
        (lambda: catalogue(space="half"), "space must be one of"),
    ],
    ids=range(7),
)
def test_bad_questions(call, message):
    with pytest.raises(InputError, match=message):
        call()


def verified(rule):
    return rule.verified(verify(rule).verification)


def with_method(rule, method):
    return replace(rule, provenance=replace(rule.provenance, method=method))


def test_the_catalogue_can_be_narrowed():
    assert {(line.family, line.N) for line in catalogue("flat", N=3)} == {("flat", 3)}
    assert sum(len(catalogue(family)) for family in ("flat", "hilbert-schmidt", "bures")) == len(SHIPPED)
    full = [line.degree for line in catalogue("flat", N=3, space="all") if line.symmetry == "full"]
    assert full[:20] == list(range(1, 21))
    assert catalogue(N=77) == ()
    assert all(isinstance(line, Shipped) for line in SHIPPED)


def test_a_table_with_fewer_nodes_takes_the_place_of_another(tmp_path):
    more = replace(
        simpson(),
        node_decimals=(*simpson().node_decimals, ("0.5", "0.5")),
        weight_decimals=(*simpson().weight_decimals, "0"),
    )
    more = more.verified(verify(more).verification)
    fewer = simpson().verified(verify(simpson()).verification)
    first = add(more, tmp_path)
    assert first == tmp_path / "flat/N2/all-full-t03-4.json"
    second = add(fewer, tmp_path)
    assert second == tmp_path / "flat/N2/all-full-t03-3.json"
    assert not first.exists()
    assert add(more, tmp_path) is None
    assert add(fewer, tmp_path) is None
    assert [line.nodes for line in reindex(tmp_path)] == [3]


def test_places_tell_measures_and_kinds_apart(tmp_path):
    rules = [simpson(), vertices_and_centre(), with_negative_weight()]
    measures = [dirichlet(["1/2", 2]), induced(2, 5), induced(2, 6), flat(2)]
    rules += [replace(simpson(), measure=measure) for measure in measures[:3]]
    rules += [replace(simpson(), symmetry="none"), replace(simpson(), space="symmetric"), replace(simpson(), degree=5)]
    block = verify(simpson()).verification
    files = [add(rule.verified(block), tmp_path) for rule in rules]
    assert len(set(files)) == len(rules)
    assert len(reindex(tmp_path)) == len(rules)


@pytest.mark.parametrize("content", ["", "{}", "[]", '{"tables": [1]}', '{"tables": [{"file": "x"}]}'])
def test_a_damaged_index_says_how_to_mend_it(content, tmp_path, monkeypatch):
    monkeypatch.setattr(find, "folder", lambda: tmp_path)
    (tmp_path / "index.json").write_text(content)
    with pytest.raises(TableError, match=r"must be the index of the shipped tables.*rebuild"):
        load(flat(2), degree=3)


def test_a_changed_table_is_not_loaded(tmp_path, monkeypatch):
    monkeypatch.setattr(find, "folder", lambda: tmp_path)
    path = add(simpson().verified(verify(simpson()).verification), tmp_path)
    reindex(tmp_path)
    path.write_text(path.read_text().replace("0.5", "0.6"))
    with pytest.raises(TableError, match="sha256 must match"):
        load(flat(2), degree=3)


def test_the_wheel_holds_every_room_and_the_tables():
    project = Path(__file__).parent.parent / "pyproject.toml"
    settings = tomllib.loads(project.read_text(encoding="utf-8"))["tool"]["setuptools"]
    root = Path(simplexcub.__file__).parent
    rooms = {".".join(["simplexcub", *path.parent.relative_to(root).parts]) for path in root.rglob("*.py")}
    assert set(settings["packages"]) == rooms | {"simplexcub.tables"}
    assert settings["package-dir"] == {"simplexcub.tables": "tables"}


# Building


def test_the_build_searches_verifies_and_keeps(tmp_path):
    said = []
    wanted = [(flat(2), 3), (flat(2), 5), (hilbert_schmidt(3), 2)]
    written = table_build.build(wanted, where=tmp_path, budget=20, say=said.append)
    assert [path.name for path in written] == ["all-full-t03-2.json", "all-full-t05-3.json", "all-full-t02-3.json"]
    assert all(verify(read(path)).holds for path in written)
    assert len(json.loads((tmp_path / "index.json").read_text())["tables"]) == 3
    assert said[0] == "flat(N=2), degree 3: 2 nodes, kept"
    before = {path: path.read_bytes() for path in written}
    assert table_build.build(wanted, where=tmp_path, budget=20, say=said.append) == []
    assert said[-1].endswith("no better than the table that is there")
    assert {path: path.read_bytes() for path in written} == before


def test_the_build_skips_what_is_there(tmp_path, monkeypatch):
    table_build.build([(flat(2), 3)], where=tmp_path, budget=20)
    monkeypatch.setattr(table_build, "solve", None)
    assert table_build.build([(flat(2), 3)], where=tmp_path, budget=20, only_missing=True) == []


@pytest.mark.parametrize(
    ("found", "message"),
    [
        (replace(simpson(), degree=5), "degree 5 claimed"),
        (with_negative_weight(), "not positive and inside"),
        (with_method(vertices_and_centre(), "conical product"), "no rule in 1 s"),
    ],
    ids=["false", "negative", "fallback"],
)
def test_the_build_refuses_what_is_not_fit_to_ship(found, message, tmp_path, monkeypatch):
    monkeypatch.setattr(table_build, "solve", lambda *_, **__: found)
    said = []
    assert table_build.build([(found.measure, found.degree)], where=tmp_path, budget=1, say=said.append) == []
    assert message in said[0]
    assert reindex(tmp_path) == ()


def test_less_symmetry_is_kept_only_with_fewer_nodes(tmp_path, monkeypatch):
    add(verified(vertices_and_centre()), tmp_path)
    loose = replace(vertices_and_centre(), symmetry="cyclic", orbits=())
    monkeypatch.setattr(table_build, "solve", lambda *_, **__: loose)
    said = []
    assert table_build.build([(loose.measure, 2)], where=tmp_path, budget=1, symmetry="best", say=said.append) == []
    assert "no fewer than with full symmetry" in said[0]


def test_an_interrupted_build_leaves_a_true_index(tmp_path, monkeypatch):
    rules = iter([simpson()])
    monkeypatch.setattr(table_build, "solve", lambda *_, **__: next(rules))
    with pytest.raises(StopIteration):
        table_build.build([(flat(2), 3), (flat(2), 5)], where=tmp_path, budget=1)
    assert len(json.loads((tmp_path / "index.json").read_text())["tables"]) == 1


def test_verifying_again_mends_the_blocks(tmp_path):
    true = verify(simpson(), prove=True).verification
    path = add(simpson().verified(replace(true, lower_bound=1, proof=None)), tmp_path)
    said = []
    table_build.refresh(tmp_path, said.append)
    assert said == ["flat/N2/all-full-t03-3.json: holds, proven"]
    assert read(path).verification == true
    assert json.loads((tmp_path / "index.json").read_text())["tables"][0]["bound"] == 2


def test_the_build_as_a_command(tmp_path, caplog):
    save(simpson(), tmp_path / "broken.json")
    (tmp_path / "broken.json").write_text("{")
    assert table_build.main(["--index", "--folder", str(tmp_path)]) == 2
    assert "broken.json must be complete JSON" in caplog.text
    (tmp_path / "broken.json").unlink()
    assert table_build.main(["--index", "--folder", str(tmp_path)]) == 0
    assert (tmp_path / "index.json").is_file()
    assert table_build.main(["--verify", "--folder", str(tmp_path)]) == 0


def test_the_targets_are_the_promised_set():
    assert len(list(table_build.targets())) == 3 * (21 + 32 + 16 + 10 + 8)
    assert {measure for measure, _ in table_build.targets(["flat"], [3])} == {flat(3)}
    assert [*table_build.targets([], [16], space="symmetric")] == [(hilbert_schmidt(16), t) for t in (6, 8, 10)]
    assert {measure.family for measure, _ in table_build.targets(space="ordered")} == {"flat", "hilbert-schmidt"}
