"""`tables`: the overview in every form, and single tables by name."""

from __future__ import annotations

import pytest
from conftest import Call

from simplexcub.errors import InputError
from simplexcub.table import catalogue
from simplexcub.table.overview import HEAD, by_name, name_of, overview


def test_the_markdown_overview_is_a_table_of_all(call: Call) -> None:
    _, out, _ = call("tables", "--to", "markdown")
    rows = [[cell.strip() for cell in line.strip("|").split("|")] for line in out]
    assert tuple(rows[0]) == HEAD
    assert len(rows) == 2 + len(catalogue())
    assert {len(row) for row in rows} == {len(HEAD)}
    for row, line in zip(rows[2:], catalogue(), strict=True):
        table = dict(zip(HEAD, row, strict=True))
        assert (int(table["nodes"]), int(table["bound"]), int(table["degree"])) == (line.nodes, line.bound, line.degree)
        assert float(table["efficiency"]) == pytest.approx(line.bound / line.nodes, abs=0.00501)
        assert table["proven"] == {True: "yes", False: "no"}[line.proven]
        assert table["name"] == name_of(line)


def test_the_latex_overview_has_one_row_per_table(call: Call) -> None:
    _, out, _ = call("tables", "flat", "-N", 3, "--to", "latex")
    rows = [line for line in out if line.startswith("flat & 3 & ")]
    assert len(rows) == len(catalogue("flat", N=3))
    assert {line.count("&") for line in rows} == {len(HEAD) - 3}  # no name; digits stand in the caption
    assert "50 digits" in "\n".join(out)


def test_every_name_shows_its_table() -> None:
    for line in catalogue("flat", N=4):
        rule = by_name(name_of(line))
        assert (len(rule), rule.degree, rule.symmetry) == (line.nodes, line.degree, line.symmetry)


@pytest.mark.parametrize("name", ["flat/N3/all-full-t05-7", "tables/flat/N3/all-full-t05-7.json"])
def test_show_prints_one_table(call: Call, name: str) -> None:
    status, out, err = call("tables", "--show", name)
    assert (status, err) == (0, [])
    assert out[0] == "simplexcub rule   Flat measure, N = 3, degree 5, 7 nodes"
    assert call("tables", "--show", name, "--to", "markdown")[1][0] == "## Flat measure, N = 3, degree 5, 7 nodes"


@pytest.mark.parametrize(
    ("arguments", "part"),
    [
        (("--show", "flat/N3/all-full-t05-8"), "Nearest: flat/N3/all-full-t05-7"),
        (("--show", "../secret"), "the name must be that of a shipped table"),
        (("flat", "--show", "flat/N3/all-full-t05-7"), "--show must come without MEASURE"),
        (("--to", "csv"), "--to"),
    ],
)
def test_questions_that_have_no_answer(call: Call, arguments: tuple[str, ...], part: str) -> None:
    status, out, err = call("tables", *arguments)
    assert (status, out, len(err)) == (2, [], 1)
    assert part in err[0]


def test_an_overview_of_another_kind_is_refused() -> None:
    with pytest.raises(InputError, match="an overview must be one of text, markdown, latex; got html"):
        overview(catalogue("flat", N=2), "html")
