"""`verify` of shipped tables from anywhere, and of several files: a line for each, and the worst status."""

from __future__ import annotations

from pathlib import Path

import pytest
from conftest import Call

from simplexcub.measures import flat
from simplexcub.table import load, render, save

SHIPPED = "tables/flat/N3/all-full-t05-7.json"


@pytest.fixture
def mine(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A working folder without tables, with two rules in ``mine`` and one as text that claims a degree too much."""
    folder = tmp_path / "mine"
    folder.mkdir()
    save(load(flat(3), degree=3), folder / "a.json")
    save(load(flat(3), degree=5), folder / "b.json")
    page = render(load(flat(3), degree=2), "text").replace("degree ≤ 2", "degree ≤ 3").replace("degree 2", "degree 3")
    (folder / "false.txt").write_text(page, encoding="utf-8")
    (folder / "unread.json").write_text("{", encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    return folder


def test_a_shipped_table_is_found_from_anywhere(call: Call, mine: Path) -> None:
    status, out, err = call("verify", SHIPPED)
    assert (status, err) == (0, [])
    assert out[0].split() == ["verified", "yes"]
    assert len(out) > 5  # all that is known of it, as of any one file


def test_several_files_get_a_line_each(call: Call, mine: Path) -> None:
    status, out, err = call("verify", "mine/a.json", SHIPPED, "mine/a.json")
    assert (status, err, len(out)) == (0, [], 3)
    assert out[0] == "yes  mine/a.json: degree 3, 50 digits, proven"
    assert out[1].endswith("all-full-t05-7.json: degree 5, 50 digits, proven")
    assert out[2] == "2 of 2 verified"


def test_a_pattern_takes_json_tables_and_says_what_it_leaves(call: Call, mine: Path) -> None:
    status, out, err = call("verify", "mine/[abf]*")
    assert [line.split(":")[0] for line in out] == ["yes  mine/a.json", "yes  mine/b.json", "2 of 2 verified"]
    assert (status, len(err)) == (0, 1)
    assert err[0].endswith("JSON tables only: false.txt")


@pytest.mark.parametrize(
    ("files", "status", "verified"),
    [
        (("a.json", "false.txt", "b.json"), 1, "2 of 3"),
        (("unread.json", "false.txt", "b.json"), 2, "1 of 3"),
        (("false.txt", "none.json"), 2, "0 of 2"),
    ],
)
def test_the_status_is_the_worst_and_every_file_is_tried(
    call: Call, mine: Path, files: tuple[str, ...], status: int, verified: str
) -> None:
    got, out, err = call("verify", *(f"mine/{name}" for name in files))
    assert (got, out[-1]) == (status, f"{verified} verified")
    assert sum(line.startswith("no   mine/false.txt: degree 3") for line in out) == 1
    bad = [name for name in files if name not in ("a.json", "b.json")]
    assert len(err) == len(bad)
    assert all(name in line for name, line in zip(bad, err, strict=True))


def test_the_measure_is_held_against_each(call: Call, mine: Path) -> None:
    for name, degree in (("a", 3), ("b", 5)):
        rule = load(flat(3), degree=degree)
        rows = (",".join([*node, w]) for node, w in zip(rule.node_decimals, rule.weight_decimals, strict=True))
        (mine / f"{name}.csv").write_text("\n".join(rows), encoding="utf-8")
    status, out, _ = call("verify", "mine/a.csv", "mine/b.csv", "--measure", "flat", "-N", 3)
    assert status == 0
    assert [line.split(":")[1].split(",")[0] for line in out[:2]] == [" exact to degree 3", " exact to degree 5"]
    status, out, err = call("verify", "mine/a.json", "mine/b.json", "--measure", "dirichlet", "--alpha", "2,2,2")
    assert (status, out, len(err)) == (2, ["0 of 2 verified"], 2)


@pytest.mark.parametrize("options", [("--mend", "out.json"), ("--states",), ("--measure", "any")])
def test_what_is_of_one_file_refuses_more(call: Call, mine: Path, options: tuple[str, ...]) -> None:
    status, out, err = call("verify", "mine/a.json", "mine/b.json", *options)
    assert (status, out, len(err)) == (2, [], 1)
    assert f"{' '.join(options).removesuffix(' out.json')} must come with one file; got 2 files" in err[0]
    assert not Path("out.json").exists()
