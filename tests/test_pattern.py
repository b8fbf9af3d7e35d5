"""Patterns of orbits in words: those of many different values are short, and are read back."""

from __future__ import annotations

from dataclasses import replace

import pytest
from test_table import wide_orbits

from simplexcub.errors import TableError
from simplexcub.rule import Orbit, Rule
from simplexcub.table import parse, render
from simplexcub.table.sheet import multiplicities, pattern
from simplexcub.table.tex import pattern as tex_pattern

VALUES = ("0.2", "0.18", "0.16", "0.14", "0.12", "0.1", "0.07", "0.03")  # they sum to 1


@pytest.mark.parametrize(
    ("counts", "text", "tex"),
    [
        ((1,) * 6, "a b c d e f", r"$a\,b\,c\,d\,e\,f$"),
        ((1,) * 7, "a … g, all different", r"$a,\dots,g$, all different"),
        ((1,) * 22, "a … v, all different", r"$a,\dots,v$, all different"),
        ((1,) * 23, "v1 … v23, all different", r"$v_{1},\dots,v_{23}$, all different"),
        ((1, 15), "a×1 b×15", r"$a{\times}1\,b{\times}15$"),
    ],
)
def test_patterns_are_short_and_read_back(counts: tuple[int, ...], text: str, tex: str) -> None:
    assert pattern(Orbit(counts, ("0",) * len(counts), "1")) == text
    assert multiplicities(text) == counts
    assert tex_pattern(text) == tex


def eight_values() -> Rule:
    """N = 8, symmetric polynomials of degree 1, of which every point of the simplex gives the mean."""
    return replace(wide_orbits(), node_decimals=(VALUES,), orbits=(Orbit((1,) * 8, VALUES, "1.0000000000000000000"),))


def test_a_text_table_with_many_different_values_is_read_back() -> None:
    text = render(eight_values(), "text")
    assert "a … h, all different" in text
    assert parse(text, "table.txt") == eight_values()
    assert r"$a,\dots,h$, all different" in render(eight_values(), "latex")


@pytest.mark.parametrize("wrong", ["a … g", "a … i", "a … z", "b … h", "v1 … v9", "v1 … v99999"])
def test_a_pattern_that_does_not_fit_is_refused(wrong: str) -> None:
    text = render(eight_values(), "text").replace("a … h", wrong)
    with pytest.raises(TableError, match="pattern"):
        parse(text, "table.txt")
