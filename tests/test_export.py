"""`export` of one table or a whole selection, `tables` in every form, and the files that come of it."""

from __future__ import annotations

import csv
import io
import json
import re
import sys
from pathlib import Path

import pytest
from conftest import Call

from simplexcub.errors import InputError
from simplexcub.measures import flat, hilbert_schmidt
from simplexcub.table import FORMATS, catalogue, encode, load, read, save
from simplexcub.table.selection import located, select, short_names
from simplexcub.table.shipped import folder

HS3 = "tables/hilbert-schmidt/N3/"


@pytest.fixture
def files(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A working folder with two rules in ``mine``, an index, a CSV table and a stray text."""
    mine = tmp_path / "mine"
    mine.mkdir()
    save(load(flat(3), degree=3), mine / "a.json")
    save(load(flat(3), degree=5), mine / "b.json")
    save(load(flat(3), degree=2), mine / "c.csv")
    (mine / "index.json").write_text("{}", encoding="utf-8")
    (mine / "notes.txt").write_text("no table", encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    return mine


# Selections


def test_a_pattern_takes_the_json_tables_only(files: Path) -> None:
    taken, left = select(["mine/*"])
    assert [path.name for path in taken] == ["a.json", "b.json"]
    assert {path.name for path in left} == {"c.csv", "index.json", "notes.txt"}
    assert select([f"mine/{path.name}" for path in sorted(files.iterdir())])[0] == taken  # as a shell would expand it


def test_one_named_file_is_taken_whatever_it_is(files: Path) -> None:
    assert select(["mine/c.csv"]) == ([Path("mine/c.csv")], [])
    assert select(["mine/c.csv", "mine/a.json"]) == ([Path("mine/a.json")], [Path("mine/c.csv")])


def test_a_file_is_taken_once_and_names_with_brackets_are_names(files: Path) -> None:
    odd = files / "a[1].json"
    odd.write_bytes((files / "a.json").read_bytes())
    assert select(["mine/a.json", "mine/a*", "mine/a.json"])[0] == [Path("mine/a.json"), Path("mine/a[1].json")]
    assert select(["mine/a[1].json"]) == ([Path("mine/a[1].json")], [])


def test_shipped_tables_are_found_where_there_is_no_such_folder(files: Path) -> None:
    name = f"{HS3}all-full-t07-15.json"
    assert located(name) == folder() / name.removeprefix("tables/")
    assert located("mine/a.json") == Path("mine/a.json")
    assert located("tables/no/such.json") == Path("tables/no/such.json")
    taken, left = select([HS3 + "*"])
    assert not left
    assert len(taken) == len(catalogue("hilbert-schmidt", N=3))
    (files.parent / "tables" / "flat").mkdir(parents=True)
    (files.parent / "tables" / "flat" / "own.json").write_bytes((files / "a.json").read_bytes())
    assert select(["tables/flat/*"])[0] == [Path("tables/flat/own.json")]


@pytest.mark.parametrize(
    ("words", "message"),
    [(["none/*.json"], "a pattern must match a file"), (["mine/*.txt", "mine/c.csv"], "of several files only JSON")],
)
def test_selections_of_nothing(files: Path, words: list[str], message: str) -> None:
    with pytest.raises(InputError, match=message):
        select(words)


def test_names_for_one_folder_differ(files: Path) -> None:
    assert short_names([files / "a.json", files / "b.json"]) == ["a", "b"]
    with pytest.raises(InputError, match="must differ in name"):
        short_names([files / "x.json", files / "x.csv"])


# The command


def test_a_whole_selection_becomes_one_latex_text(call: Call, files: Path) -> None:
    status, out, err = call("export", "mine/*", "--to", "latex")
    assert status == 0
    assert len(err) == 1
    assert "left out" in err[0]
    assert "c.csv, index.json, notes.txt" in err[0]
    assert "\n".join(out).count(r"\caption") == 3
    alone = call("export", "mine/a.json", "--to", "latex")[1]
    assert "\n".join(alone).count(r"\caption") == 1


def test_markdown_holds_several_rules_too(call: Call, files: Path) -> None:
    _, out, _ = call("export", "mine/a.json", "mine/b.json", "--to", "markdown")
    assert [line for line in out if line.startswith("## ")] == [
        "## Flat measure, N = 3, degree 3, 4 nodes",
        "## Flat measure, N = 3, degree 5, 7 nodes",
    ]


@pytest.mark.parametrize("to", [name for name, form in FORMATS.items() if form.several is None])
def test_formats_that_hold_one_rule_refuse_more_in_one_line(call: Call, files: Path, to: str) -> None:
    target = files / "out.file"
    status, out, err = call("export", "mine/a.json", "mine/b.json", "--to", to, "-o", target)
    assert (status, out, len(err)) == (2, [], 1)
    assert f"{to} holds one rule in a file" in err[0]
    assert "give a folder" in err[0]
    assert not target.exists()
    with pytest.raises(InputError, match="holds one rule"):
        encode([load(flat(3), degree=3)] * 2, to)


@pytest.mark.parametrize("to", FORMATS)
def test_a_folder_gets_one_file_per_table(call: Call, files: Path, to: str) -> None:
    status, out, _ = call("export", "mine/*", "--to", to, "-o", "out/")
    assert (status, out) == (0, [])
    ending = FORMATS[to].endings[0]
    assert sorted(path.name for path in Path("out").iterdir()) == [f"a{ending}", f"b{ending}"]
    assert Path(f"out/a{ending}").read_bytes() == encode(load(flat(3), degree=3), to)


def test_the_ending_chooses_the_format(call: Call, files: Path) -> None:
    assert call("export", "mine/a.json", "-o", "a.f90") == (0, [], [])
    assert Path("a.f90").read_text(encoding="ascii").startswith("! Flat measure, N = 3, degree 3")
    status, out, err = call("export", "mine/a.json")
    assert (status, out, len(err)) == (2, [], 1)
    assert "neither --to nor -o" in err[0]


@pytest.mark.parametrize("folder", ["new/", "mine"])
def test_a_folder_has_no_ending_and_needs_the_format(call: Call, files: Path, folder: str) -> None:
    status, out, err = call("export", "mine/a.json", "-o", folder)
    assert (status, out, len(err)) == (2, [], 1)
    assert f"a folder must come with --to; got -o {folder}. --to is one of json, " in err[0]
    assert not Path("new").exists()


def test_up_to_leaves_out_higher_degrees(call: Call, files: Path) -> None:
    _, out, _ = call("export", "mine/a.json", "mine/b.json", "--to", "markdown", "--up-to", 4)
    assert [line for line in out if line.startswith("## ")] == ["## Flat measure, N = 3, degree 3, 4 nodes"]
    status, out, err = call("export", "mine/a.json", "mine/b.json", "--to", "markdown", "--up-to", 2)
    assert (status, out, len(err)) == (2, [], 1)


def test_digits_round_every_format_and_say_so(call: Call, files: Path) -> None:
    assert call("export", "mine/b.json", "--digits", 16, "-o", "b.json") == (0, [], [])
    short = read("b.json")
    assert short.digits == 16
    assert short.provenance.method.endswith("rounded from 50 digits")
    for to in ("text", "markdown", "latex", "python", "c", "fortran", "csv"):
        text = "\n".join(call("export", "mine/b.json", "--to", to, "--digits", 16)[1])
        assert "rounded from 50 digits" in text
        assert max(len(number) for number in re.findall(r"0\.(\d+)", text)) <= 17
    status, out, err = call("export", "mine/b.json", "--to", "text", "--digits", 60)
    assert (status, out, len(err)) == (2, [], 1)
    assert "50; got 60" in err[0]


def test_form_chooses_orbits_or_nodes(call: Call, files: Path) -> None:
    full = f"{HS3}all-full-t04-6.json"
    by_orbits = call("export", full, "--to", "text", "--form", "orbits")[1]
    assert by_orbits == call("export", full, "--to", "text")[1]
    by_nodes = call("export", full, "--to", "text", "--form", "full")[1]
    assert sum(line.split()[1:2] == ["λ1"] for line in by_nodes) == 6
    assert not any("a a b" in line for line in by_nodes)
    status, out, err = call("export", "mine/a.json", "--to", "text", "--form", "orbits")
    assert (status, out, len(err)) == (2, [], 1)
    assert "must have orbits" in err[0]


def test_standalone_is_a_document_and_for_latex_only(call: Call, files: Path) -> None:
    _, out, _ = call("export", "mine/a.json", "--to", "latex", "--standalone")
    assert out[0] == r"\documentclass[10pt,a4paper]{article}"
    assert out[-1] == r"\end{document}"
    status, out, err = call("export", "mine/a.json", "--to", "csv", "--standalone")
    assert (status, out, len(err)) == (2, [], 1)


def test_a_folder_that_cannot_be_made_is_one_line(call: Call, files: Path) -> None:
    Path("taken").write_text("a file", encoding="utf-8")
    status, out, err = call("export", "mine/a.json", "--to", "csv", "-o", "taken/deep/")
    assert (status, out, len(err)) == (2, [], 1)
    assert "must be a folder" in err[0]


def test_an_interrupted_export_leaves_whole_files_only(
    call: Call, files: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    real = FORMATS["csv"].export
    done: list[str] = []

    def second_is_interrupted(rule):
        if done:
            raise KeyboardInterrupt
        done.append("one")
        return real(rule)

    monkeypatch.setattr(
        "simplexcub.table.formats.FORMATS", {**FORMATS, "csv": type(FORMATS["csv"])((".csv",), second_is_interrupted)}
    )
    assert call("export", "mine/*.json", "--to", "csv", "-o", "out/")[0] == 130
    assert [path.name for path in Path("out").iterdir()] == ["a.csv"]
    assert read("out/a.csv") == load(flat(3), degree=3)


def test_progress_is_shown_on_a_terminal_only(call: Call, files: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    class Terminal(io.StringIO):
        def isatty(self) -> bool:
            return True

    screen = Terminal()
    assert call("export", "mine/a.json", "mine/b.json", "--to", "markdown")[2] == []
    monkeypatch.setattr(sys, "stderr", screen)
    call("export", "mine/a.json", "mine/b.json", "--to", "csv", "-o", "out/")
    for step in ("reading 1 of 2: a.json", "reading 2 of 2: b.json", "writing 1 of 2: a", "writing 2 of 2: b"):
        assert step in screen.getvalue()


# Digits


@pytest.mark.parametrize("to", ["csv", "json", "text", "python", "markdown"])
def test_every_text_form_of_a_shipped_table_holds_the_same_digits(to: str) -> None:
    rule = load(hilbert_schmidt(3), degree=6)
    text = encode(rule, to).decode("utf-8")
    numbers = {
        "csv": lambda: [x for row in csv.reader(io.StringIO(text)) if row and row[0][:2] == "0." for x in row],
        "json": lambda: [
            x for node, w in zip(*map(json.loads(text).get, ("nodes", "weights")), strict=True) for x in (*node, w)
        ],
        "text": lambda: re.findall(r"(0\.\d+)", re.sub(r"(?<=\d)(?: |\n {20,})(?=\d)", "", text.split("─\n")[-1])),
        "python": lambda: re.findall(r'"(0\.\d+)"', text),
        "markdown": lambda: re.findall(r"`(0\.\d+)`", text),
    }[to]()
    wanted = [x for node, w in zip(rule.node_decimals, rule.weight_decimals, strict=True) for x in (*node, w)]
    assert sorted(numbers) == sorted(wanted)
